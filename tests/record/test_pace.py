"""Slower and faster: a recorded level that the pace never exceeds, and that never exceeds the plan's."""

from __future__ import annotations

from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.record.following import turning
from tests.record.samples import CPT
from windctl.plan.pace import PaceSpec, least_percent, most_pace, pace_for
from windctl.record.events import PaceAsked, Resumed
from windctl.record.fold import fold, replay
from windctl.record.wanting import wanted

SPECS = st.builds(
    PaceSpec,
    start_pace=st.integers(1, 15_000),
    start_counts=st.integers(0, 100_000),
    cruise_pace=st.integers(1, 15_000),
    finish_pace=st.integers(1, 15_000),
    finish_counts=st.integers(0, 100_000),
)


@given(SPECS, st.integers(-50, 1000))
def test_no_request_is_faster_than_planned_or_slower_than_the_first_turns(
    spec: PaceSpec, percent: int
) -> None:
    assert min(spec.start_pace, spec.cruise_pace) <= most_pace(spec, percent) <= spec.cruise_pace


@given(SPECS)
def test_the_least_percentage_is_the_first_turns_pace(spec: PaceSpec) -> None:
    least = least_percent(spec)
    assert most_pace(spec, least - 1) == min(spec.start_pace, spec.cruise_pace)
    assert most_pace(spec, 100) == spec.cruise_pace
    assert 1 <= least <= 100


@pytest.mark.parametrize("percent", [100, 90, 40, 1, 900])
def test_what_was_asked_for_is_wanted_of_the_board_until_something_else_is(percent: int) -> None:
    coil = turning(500.0)
    planned = coil.decision.wants.pace
    assert planned == 6667  # the cruising pace of the sample
    coil.hear(PaceAsked(0, percent, "operator"))
    assert coil.decision.wants.pace == max(400, min(6667, 6667 * percent // 100))
    coil.hear(PaceAsked(0, 100, "operator"))
    assert coil.decision.wants.pace == planned


def test_slow_turns_stay_as_slow_as_they_are() -> None:
    coil = turning(5.0)
    assert coil.state.count == 5 * CPT  # within the slow first turns
    assert coil.decision.wants.pace == 400
    coil.hear(PaceAsked(0, 50, "operator"))
    assert coil.decision.wants.pace == 400


@pytest.mark.parametrize("percent", [100, 70, 10])
@pytest.mark.parametrize("count", [0, 3999, 4000, 200_000, 399_000])
def test_it_is_never_more_than_without_the_request(percent: int, count: int) -> None:
    coil = turning(500.0)
    started = coil.state.started
    assert started is not None
    state = fold(replace(coil.state, count=count, stop_point=400_000), PaceAsked(0, percent, "operator"))
    assert wanted(state).pace <= pace_for(started.pace, count, 400_000)


def test_it_is_remembered_over_an_interruption_and_replayed_alike() -> None:
    coil = turning(500.0)
    coil.hear(PaceAsked(0, 60, "operator"), Resumed(0, "2026-03-02T11:00:00+01:00", "bench one", "0.1.0"))
    assert coil.state.pace_percent == 60
    assert replay(coil.facts) == coil.state
