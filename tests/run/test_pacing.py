"""Slower and faster on the virtual machine: the spindle obeys, the record remembers, the replay agrees."""

from __future__ import annotations

import time
from dataclasses import replace
from pathlib import Path

import pytest

from tests.record.following import turning
from tests.run.winding import SHIPPED, wind, with_key, with_stop
from windctl.book.open import open_book
from windctl.machine.virtual.bench import Bench
from windctl.profile.builtin import VIRTUAL
from windctl.protocol.messages import Capability
from windctl.protocol.messages import State as BoardState
from windctl.record.events import PaceAsked, StatusHeard
from windctl.record.fold import replay
from windctl.run.answers import answer
from windctl.run.requests import Faster, Request, Slower
from windctl.run.wind import Winding

COIL = with_stop(SHIPPED, turns=260, tolerance_pct=0.5)
for _key, _value in {"cruise_rpm": 1000, "start_rpm": 300, "start_turns": 5, "ramp_rpm_per_s": 300}.items():
    COIL = with_key(COIL, _key, _value)


def asked(request: Request, percent: int) -> tuple[list[int], str]:
    """The percentages that follow at a coil with this one, and what is said."""
    coil = turning(500.0)
    coil.hear(PaceAsked(0, percent, "operator"))
    replied = answer(request, coil.state, coil.decision, 0, leaving=False)
    return [fact.percent for fact in replied.facts if isinstance(fact, PaceAsked)], replied.says


@pytest.mark.parametrize(
    ("request_", "percent", "then", "words"),
    [
        (Slower("operator"), 100, [90], "at most 900 rpm, 90 % of the planned pace"),
        (Slower("operator"), 94, [90], "90 %"),
        (Faster("operator"), 90, [100], "at most 1000 rpm, as planned"),
        (Faster("operator"), 6, [10], "10 %"),
        (Slower("operator"), 10, [6], "at most 60 rpm"),
        (Faster("operator"), 100, [], "it stays at 1000 rpm: that is as planned"),
        (Slower("operator"), 6, [], "it stays at 60 rpm: its first turns are no slower"),
    ],
)
def test_a_step_is_a_tenth_of_the_plan(request_: Request, percent: int, then: list[int], words: str) -> None:
    """The sample's pace: 6667 steps/s of 400 a turn are 1000 rpm, its first turns 400 steps/s, 60 rpm."""
    percents, says = asked(request_, percent)
    assert percents == then
    assert words in says


def test_a_spindle_that_is_not_driven_here_is_not_slowed_here() -> None:
    coil = turning(500.0)
    started = coil.state.started
    assert started is not None
    bare = replace(started.setup, fitted=int(Capability.CONTACT))
    coil.state = replace(coil.state, started=replace(started, setup=bare))
    replied = answer(Slower("operator"), coil.state, coil.decision, 0, leaving=False)
    assert replied.facts == ()
    assert "your own motor" in replied.says


def test_the_spindle_obeys_and_the_record_tells_the_same(tmp_path: Path) -> None:
    def slower(winding: Winding, bench: Bench) -> None:
        for _ in range(6):
            winding.request(Slower("operator"))  # from the first turn on
        end = time.monotonic() + 60
        while winding.look().pace_percent > 40:
            assert time.monotonic() < end
            time.sleep(0.001)

    wound = wind(COIL, tmp_path / "coils.book", during=slower)
    assert wound.outcome.summary.outcome == "finished"
    with open_book(tmp_path / "coils.book") as book:
        events = list(book.events(wound.outcome.number))
    assert replay(events) == wound.ended.state
    asked = [place for place, event in enumerate(events) if isinstance(event, PaceAsked)]
    assert [event.percent for event in events if isinstance(event, PaceAsked)] == [90, 80, 70, 60, 50, 40]
    turned = [
        event.status
        for event in events[asked[-1] :]
        if isinstance(event, StatusHeard) and event.status.state == BoardState.TURNING
    ]
    cruise = wound.ended.state.started.pace.cruise_pace  # type: ignore[union-attr]  # it has started
    speeds = [status.speed for status in turned if status.count > 80 * VIRTUAL.spindle.counts_per_turn]
    assert len(speeds) > 40
    assert 0.38 * cruise <= max(speeds) <= 0.4 * cruise
    assert VIRTUAL.spindle.steps_per_turn == VIRTUAL.spindle.counts_per_turn
