"""Coils that are stopped to be read, on the virtual machine: the contact is put to the wire once nothing is
powered, and the coil meets its target."""

from __future__ import annotations

import dataclasses
from pathlib import Path

import pytest

from tests.conftest import LONG
from tests.run.winding import SHIPPED, SHORT_TURNS, wind, with_key, with_stop
from windctl.book.open import open_book
from windctl.profile.builtin import VIRTUAL
from windctl.record.events import CheckAsked, CheckTaken, GoGiven, HandsAsked, Held, ReadingTaken, WentOn
from windctl.record.fold import replay

CHECKS = VIRTUAL.model_copy(update={"readings": VIRTUAL.readings.model_copy(update={"mode": "checks"})})
NONE = VIRTUAL.model_copy(update={"readings": VIRTUAL.readings.model_copy(update={"mode": "none"})})

# The shipped coil cut short, and quick about it.
SHORT = with_stop(SHIPPED, dcr_20c_ohm=300, tolerance_pct=3, min_turns=300, max_turns=600)
for _key, _value in {"cruise_rpm": 700, "ramp_rpm_per_s": 300}.items():
    SHORT = with_key(SHORT, _key, _value)


@pytest.mark.parametrize("seed", range(20, 60) if LONG else (20, 21, 22))
def test_a_coil_is_stopped_read_and_wound_to_its_target(tmp_path: Path, seed: int) -> None:
    wound = wind(SHORT, tmp_path / "coils.book", plant_seed=seed, profile=CHECKS)
    summary = wound.outcome.summary
    assert (summary.outcome, summary.reason) == ("finished", "the target is met")
    assert summary.dcr_20c_ohm is not None and summary.dcr_u95_ohm is not None
    assert abs(summary.dcr_20c_ohm - wound.truth.true_dcr_20c_ohm) <= 1.6 * summary.dcr_u95_ohm
    assert abs(wound.truth.true_dcr_20c_ohm - 300.0) <= 0.02 * 300.0
    with open_book(tmp_path / "coils.book") as book:
        events = list(book.events(wound.outcome.number))
    assert replay(events) == wound.ended.state
    assert 1 <= len([event for event in events if isinstance(event, CheckTaken)]) <= 2


def test_nothing_is_powered_while_the_wire_is_touched(tmp_path: Path) -> None:
    """Asked, drives off, readings at rest, and only after them a new consent."""
    wound = wind(SHORT, tmp_path / "coils.book", plant_seed=23, profile=CHECKS)
    with open_book(tmp_path / "coils.book") as book:
        events = list(book.events(wound.outcome.number))
    told = [
        event
        for event in events
        if isinstance(event, CheckAsked | HandsAsked | CheckTaken | GoGiven | WentOn | Held)
    ]
    kinds = [type(event).__name__ for event in told]
    first = kinds.index("CheckAsked")
    assert kinds[first - 1 : first + 3] == ["Held", "CheckAsked", "HandsAsked", "CheckTaken"]
    assert kinds[first + 3 : first + 6] == ["GoGiven", "GoGiven", "WentOn"]  # powering, then starting
    between = events[events.index(told[first]) : events.index(told[first + 2])]
    assert len([event for event in between if isinstance(event, ReadingTaken)]) >= 8
    before = events[: events.index(told[first])]
    assert not any(isinstance(event, ReadingTaken) for event in before)  # nothing touches it while it turns


def test_a_coil_for_turns_is_read_once_at_its_end(tmp_path: Path) -> None:
    wound = wind(SHORT_TURNS, tmp_path / "coils.book", profile=CHECKS)
    summary = wound.outcome.summary
    assert (summary.outcome, summary.turns, summary.verdict) == ("finished", 400.0, "within")
    assert summary.dcr_20c_ohm is not None and summary.dcr_u95_ohm is not None
    assert abs(summary.dcr_20c_ohm - wound.truth.true_dcr_20c_ohm) <= 2.0 * summary.dcr_u95_ohm
    assert summary.dcr_u95_ohm < 0.02 * summary.dcr_20c_ohm


def test_without_readings_the_coil_stops_where_it_was_planned(tmp_path: Path) -> None:
    """The interval is as wide as the spool is unsure, and the coil is not judged."""
    wound = wind(SHORT, tmp_path / "coils.book", profile=NONE)
    summary = wound.outcome.summary
    assert summary.outcome == "finished"
    assert summary.verdict == "not judged"
    assert summary.dcr_20c_ohm == pytest.approx(300.0, rel=0.005)
    assert summary.dcr_u95_ohm is not None and summary.dcr_u95_ohm > 0.07 * 300.0
    assert wound.outcome.waiting is None


def test_a_warm_coil_that_cannot_be_judged_is_to_be_read_again(tmp_path: Path) -> None:
    """What it then should read is what the simulated coil, cooled, would show at its ends."""
    strict = SHORT.replace("tolerance_pct = 3", "tolerance_pct = 0.2")
    wound = wind(strict, tmp_path / "coils.book", plant_seed=24, profile=CHECKS)
    wait = wound.outcome.waiting
    assert wound.outcome.summary.verdict != "within"
    assert wait is not None
    assert 5 <= wait.minutes <= 9
    assert wait.then_u95 < wait.now_u95
    cold = wound.truth.true_dcr_20c_ohm * (1 + 0.00393 * (wait.celsius - 20.0)) + VIRTUAL.readings.lead_ohm
    assert abs(wait.ohm - cold) < 2.0 * wait.now_u95
    assert dataclasses.asdict(wait).keys() >= {"minutes", "ohm", "celsius"}
