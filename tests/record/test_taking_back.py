"""A typed reading that was a mistake: taken back, the coil is where it was, and is asked to be read again."""

from __future__ import annotations

from dataclasses import replace

import pytest

from tests.record.following import Coil, at_rest, measured, turning
from tests.record.samples import CPT, reading, status
from windctl.protocol.messages import Cause
from windctl.protocol.messages import State as BoardState
from windctl.record.events import (
    CheckTaken,
    CoilFinished,
    EndRequested,
    Event,
    GoGiven,
    NoteMade,
    ReadingTaken,
    ReadingTakenBack,
    ReadingTyped,
    Spliced,
    StatusHeard,
    StopPointChosen,
)
from windctl.record.fold import replay
from windctl.record.taking_back import TAKE_BACK_TICKS

OFF_AT = 95_000


def at_a_check(kind: str = "dcr_20c_ohm", value: float = 1000.0) -> tuple[Coil, float]:
    """A coil that stands, its drives off, and waits to be read; and its turn."""
    coil = turning(mode="checks", kind=kind, value=value)
    assert coil.state.stop_point is not None
    stop = coil.state.stop_point / CPT
    at_rest(coil, stop, Cause.STOP_POINT)
    hear_status(coil, OFF_AT)
    assert coil.decision.asks == "reading"
    return coil, stop


def hear_status(coil: Coil, ticks: int) -> list[Event]:
    now = coil.state.status
    assert now is not None
    off = status(
        ticks, state=BoardState.DRIVES_OFF, cause=Cause.DISARM, epoch=13, count=now.count, next=now.next
    )
    return coil.hear(StatusHeard(0, off))


def test_the_coil_is_as_it_was_and_is_to_be_read_again() -> None:
    coil, stop = at_a_check()
    before = coil.state
    taken, more = coil.hear(ReadingTyped(0, stop, 0.93 * measured(stop), 20.0, "operator"))
    assert isinstance(taken, CheckTaken)
    assert isinstance(more, StopPointChosen)
    assert coil.state.estimate != before.estimate
    assert coil.hear(ReadingTakenBack(0, "operator")) == []
    unlike = {"fresh_reading", "read_last", "stop_choices"}
    assert {name for name, value in vars(coil.state).items() if value != vars(before)[name]} <= unlike
    assert coil.decision.asks == "reading"

    follows = coil.hear(ReadingTyped(0, stop, measured(stop), 20.0, "operator"))
    assert isinstance(follows[0], CheckTaken)
    other, _ = at_a_check()
    other.hear(ReadingTyped(0, stop, measured(stop), 20.0, "operator"))
    assert coil.state.estimate == other.state.estimate
    assert coil.state.stop_point == other.state.stop_point
    assert replay(coil.facts) == coil.state


def test_a_reading_that_ends_the_coil_waits_for_second_thoughts() -> None:
    coil, stop = at_a_check("turns", 1000.0)
    (taken,) = coil.hear(ReadingTyped(0, stop, measured(stop), 20.0, "operator"))
    assert isinstance(taken, CheckTaken)
    assert hear_status(coil, OFF_AT + TAKE_BACK_TICKS - 1) == []
    coil.hear(ReadingTakenBack(0, "operator"))
    assert coil.decision.asks == "reading"
    assert hear_status(coil, OFF_AT + 2 * TAKE_BACK_TICKS) == []  # nothing ends it without a reading
    coil.hear(ReadingTyped(0, stop, measured(stop), 20.0, "operator"))
    (end,) = hear_status(coil, OFF_AT + 3 * TAKE_BACK_TICKS)
    assert isinstance(end, CoilFinished)
    assert end.verdict == "within"


def test_somebody_who_ends_the_coil_does_not_wait() -> None:
    coil, stop = at_a_check("turns", 1000.0)
    coil.hear(ReadingTyped(0, stop, measured(stop), 20.0, "operator"))
    (end,) = coil.hear(EndRequested(0, "operator", "ended by the operator"))
    assert isinstance(end, CoilFinished)


@pytest.mark.parametrize("what", ["go", "splice", "reading"])
def test_what_comes_after_it_makes_it_stay(what: str) -> None:
    coil, stop = at_a_check()
    coil.hear(ReadingTyped(0, stop, measured(stop), 20.0, "operator"))
    assert coil.state.before_typed is not None
    coil.hear(NoteMade(0, "nothing changes by this", "operator"))
    assert coil.state.before_typed is not None
    later: dict[str, Event] = {
        "go": GoGiven(0, 5, 13, "operator"),
        "splice": Spliced(0, stop, "operator"),
        "reading": ReadingTaken(0, reading(OFF_AT + 900, stop, measured(stop), resting=True)),
    }
    state = coil.state
    coil.state = replace(state, hands=None) if what == "reading" else state
    coil.hear(later[what])
    assert coil.state.before_typed is None
    estimate = coil.state.estimate
    coil.hear(ReadingTakenBack(0, "operator"))
    assert coil.state.estimate == estimate
