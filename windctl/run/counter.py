"""A turn that somebody read off a counter where nobody counts for windctl: whether it can be, and what it
says. Pure.

Numbers are typed wrong. One that can hardly be changes nothing and is asked about; the same once more is
believed. One that is wrong and could be is taken back, or put right by the next.
"""

from __future__ import annotations

from windctl.numbers import grouped
from windctl.record.events import CounterRead
from windctl.record.state import State
from windctl.run.said import Answer

_FAR_PAST = 100  # a hundredth of the way to the stop, and
_AT_LEAST = 20  # turns: hands and eyes overshoot by less
_A_DIGIT = 5  # so many times too few: a digit was left out
NEVER = 10  # times the turns of the program

UNWIND = "unwind"  # how the reason for hands at the wire begins, where turns are to be taken off

NO_POWER = "windctl cannot start, slow or stop this machine"


def counter_says(turn: float, by: str, state: State, at_ms: int) -> Answer:
    """The facts of a typed turn and what it comes to, or why it is asked about."""
    whole = round(turn)
    if abs(turn - whole) > 1e-9:
        low = int(turn)
        return Answer(says=f"whole turns are meant: {grouped(low)} or {grouped(low + 1)}")
    started = state.started
    most = 0 if started is None else started.total_counts
    if not 0 <= whole <= NEVER * most:
        return Answer(says=f"{grouped(whole)} turns cannot be: this coil has {grouped(most)} at the most")
    if state.doubted != whole:
        doubt = _doubt(whole, state)
        if doubt is not None:
            fact = CounterRead(at_ms, whole, by, doubted=True)
            return Answer((fact,), f"{doubt}; if the counter really says so, say {grouped(whole)} once more")
    recounted = _behind_a_reading(whole, state)
    return Answer((CounterRead(at_ms, whole, by, recounted=recounted),), _told(whole, state))


def unwinding(state: State) -> bool:
    """Turns are being taken off."""
    return state.hands is not None and state.hands.reason.startswith(UNWIND)


def _doubt(turn: int, state: State) -> str | None:
    """Why it can hardly be."""
    stop = state.stop_point
    if stop is not None and turn > state.count and turn - stop > max(_AT_LEAST, stop // _FAR_PAST):
        return f"{grouped(turn)} is {grouped(turn - stop)} turns past the stop at {grouped(stop)}"
    if _behind_a_reading(turn, state):
        assert state.estimate is not None
        known = grouped(state.estimate.turn)
        return (
            f"{grouped(turn)} is less than the {known} turns at which the coil was last read or joined "
            "(where turns are taken off, say unwind first)"
        )
    if turn * _A_DIGIT < state.count - _AT_LEAST and not unwinding(state):
        return f"{grouped(turn)} is far less than the {grouped(state.count)} turns that were said before"
    return None


def _behind_a_reading(turn: int, state: State) -> bool:
    """What is known of the coil was measured beyond that turn, so one of the two counts is wrong."""
    estimate = state.estimate
    return estimate is not None and turn < state.count and turn < estimate.turn and not unwinding(state)


def _told(turn: int, state: State) -> str:
    stop = state.stop_point
    if turn == state.count:
        return f"the counter stands at {grouped(turn)}, as it was"
    if turn < state.count:
        return f"noted: {grouped(turn)} turns lie on the bobbin, not {grouped(state.count)}"
    if stop is not None and turn > stop:
        past = "1 turn" if turn == stop + 1 else f"{grouped(turn - stop)} turns"
        return f"noted: {grouped(turn)} turns, {past} past the stop at {grouped(stop)}"
    return f"noted: {grouped(turn)} turns"
