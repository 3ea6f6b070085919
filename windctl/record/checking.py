"""A check: the coil stands, its drives off, and its resistance is read by the contact or by hand."""

from __future__ import annotations

from windctl.forecast.checking import MOST_CHECKS, check_at, worth_checking
from windctl.forecast.finish import turn_for
from windctl.record.events import CheckAsked, CheckTaken, Event, HandsAsked
from windctl.record.state import Fit, State

ENOUGH = 8  # readings of the contact at rest


def to_be_read(state: State) -> bool:
    """The coil has come to rest where it was to stop, and is to be read there before anything else.

    Once at the first such stop; once more after the missing turns, where it may still change something.
    """
    started, estimate = state.started, state.estimate
    assert started is not None and estimate is not None
    if state.check is not None:
        return state.in_hand
    if started.readings_mode != "checks" or not (state.fit is Fit.SAME or state.by_eye):
        return False
    if state.checked_count == state.count:
        return False
    if state.checked_count is None:
        return True
    target = started.target
    if target.kind == "turns" or state.checks >= MOST_CHECKS:
        return False
    return worth_checking(estimate, state.turns, target.value, target.tolerance_pct)


def checking(state: State, at_ms: int) -> tuple[Event, ...]:
    """The next step of a check: ask for it, drives off; once there is a reading, it is over."""
    started, estimate = state.started, state.estimate
    assert started is not None and estimate is not None
    turn = state.turns
    if state.check is None:
        target = started.target
        end = turn if target.kind == "turns" else max(turn, turn_for(estimate, target.value).turn)
        found = check_at(estimate, turn, min(end, float(target.max_turns)))
        asked = CheckAsked(at_ms, turn, found.without_ohm, found.with_ohm)
        if state.by_eye:
            return (asked,)  # no drives to switch off
        return (asked, HandsAsked(at_ms, "windctl", "read the resistance"))
    if state.typed:
        return (CheckTaken(at_ms, turn, True, "operator"),)
    if state.settled_readings >= ENOUGH:
        return (CheckTaken(at_ms, turn, True, "contact"),)
    return ()
