"""Coils that are stopped to be read, on the virtual machine: the contact is put to the wire once nothing is
powered, and the coil meets its target."""

from __future__ import annotations

import dataclasses
from pathlib import Path

import pytest

from tests.conftest import LONG
from tests.record.following import Coil, at_rest, measured, turning
from tests.record.samples import CPT, status
from tests.run.winding import SHIPPED, SHORT_TURNS, wind, with_key, with_stop
from windctl.book.open import open_book
from windctl.numbers import grouped
from windctl.profile.builtin import VIRTUAL
from windctl.protocol.messages import Cause
from windctl.protocol.messages import State as BoardState
from windctl.record.events import (
    CheckAsked,
    CheckTaken,
    GoGiven,
    HandsAsked,
    Held,
    ReadingTaken,
    StatusHeard,
    WentOn,
)
from windctl.record.fold import replay
from windctl.run.answers import answer
from windctl.run.requests import Read, Request, Skip
from windctl.run.snapshot import snapshot

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


def test_what_is_said_at_a_check_and_after_it() -> None:
    """Where, what it gains, and that the bared spot is to be insulated again."""
    coil = turning(mode="checks")
    assert coil.state.stop_point is not None
    stop = coil.state.stop_point / CPT
    at_rest(coil, stop, Cause.STOP_POINT)
    off = status(95_000, state=BoardState.DRIVES_OFF, epoch=13, count=round(stop * CPT), next=100)
    coil.hear(StatusHeard(0, off))
    seen = snapshot(coil.state, coil.decision, 200.0)
    assert seen.asks == "reading"  # no contact came
    where = (
        f"drives off, hands may go in: read the resistance at turn {grouped(stop)}; the finish is known to"
    )
    assert seen.says.startswith(where)
    request = Read("operator", measured(stop), 20.0)
    replied = answer(request, coil.state, coil.decision, 0, leaving=False)
    assert "Insulate the bared spot again" in replied.says
    coil.hear(*replied.facts)
    seen = snapshot(coil.state, coil.decision, 200.0)
    assert seen.asks == "go"
    assert "insulate the bared spot again" in seen.says


def at_a_check() -> Coil:
    coil = turning(mode="checks")
    assert coil.state.stop_point is not None
    at_rest(coil, coil.state.stop_point / CPT, Cause.STOP_POINT)
    off = status(95_000, state=BoardState.DRIVES_OFF, epoch=13, count=coil.state.stop_point, next=100)
    coil.hear(StatusHeard(0, off))
    return coil


@pytest.mark.parametrize(
    ("request_", "words", "facts"),
    [
        (Read("operator", 0.95), "about a thousand times off the expected", 0),
        (Read("operator", 950.0, 200.0), "200 °C cannot be", 0),
        (Read("operator", 1500.0, 20.0), "does not fit the expected", 1),
        (Skip("operator"), "passed over", 1),
    ],
    ids=["kilohm", "too warm", "too much", "skip"],
)
def test_what_is_typed_at_a_check(request_: Request, words: str, facts: int) -> None:
    coil = at_a_check()
    replied = answer(request_, coil.state, coil.decision, 0, leaving=False)
    assert words in replied.says
    assert len(replied.facts) == facts


def test_a_reading_by_hand_anywhere_else_wants_the_drives_off_first() -> None:
    coil = turning(mode="live")
    at_rest(coil, 500.0, Cause.HOLD)
    replied = answer(Read("operator", 330.0, 20.0), coil.state, coil.decision, 0, leaving=False)
    (hands,) = replied.facts
    assert isinstance(hands, HandsAsked)
    assert "Then say it again" in replied.says
    assert answer(Skip("operator"), coil.state, coil.decision, 0, leaving=False).facts == ()
