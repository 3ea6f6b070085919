"""How a coil ends: tripped, ended by somebody, or at its target, judged and with a reason."""

from __future__ import annotations

from dataclasses import replace

from windctl.forecast.finish import finish_at, so_far
from windctl.forecast.stop import missing_turns
from windctl.forecast.verdict import verdict
from windctl.protocol.messages import Trip
from windctl.record.checking import checking, to_be_read
from windctl.record.events import CoilFinished, Event, StopPointChosen
from windctl.record.state import Fit, State
from windctl.record.taking_back import second_thoughts

SETTLED_ENOUGH = 8  # readings at rest before the coil is judged
SETTLE_LIMIT_TICKS = 8_000  # without them it is judged on what there is
MOST_TOP_UPS = 3
WORTH_A_START = 0.02  # of the tolerance: fewer missing turns are not worth another start and another settling


def ending(state: State, at_ms: int) -> tuple[Event, ...]:
    """The end of the coil, or the stop point that a last reading adds; nothing while it is to go on."""
    started, status = state.started, state.status
    assert started is not None
    if state.end is not None and state.standing:
        if state.tripped is not None:
            trip = Trip(state.tripped.trip).name.lower().replace("_", " ")
            return (_finished(state, at_ms, "tripped", f"the board tripped: {trip}"),)
        return (_finished(state, at_ms, "stopped", state.end.reason),)
    if status is None or state.stop_point is None or state.count < state.stop_point:
        return ()
    if state.check is not None and state.in_hand:
        return checking(state, at_ms)
    if state.by_eye and state.counter is None:
        return ()  # another run, and nobody has said yet that the counter agrees with the record
    if state.fit is Fit.CORRECTED:  # somebody has said that it is there, and agreed to go on from there
        if state.consent is None and not state.by_eye:
            return ()
    elif state.held is None or (started.readings_mode == "live" and not _settled(state)):
        return ()
    if to_be_read(state):
        return checking(state, at_ms)
    follows = _at_target(state, at_ms)
    over = any(isinstance(event, CoilFinished) for event in follows)
    return () if over and second_thoughts(state) else follows


def _at_target(state: State, at_ms: int) -> tuple[Event, ...]:
    started = state.started
    assert started is not None
    target = started.target
    if target.kind == "turns":
        over = round(state.turns - target.value)
        words = f"{_turns(over)} more than asked for" if over > 0 else "the turns asked for are wound"
        return (_finished(state, at_ms, "finished", words),)
    if state.readings_used == 0 or (started.readings_mode == "live" and state.settled_readings == 0):
        return (
            _finished(
                state, at_ms, "finished", "stopped where the forecast meets the target; no settled reading"
            ),
        )
    return _judge_resistance(state, at_ms)


def _settled(state: State) -> bool:
    assert state.held is not None and state.status is not None
    return (
        state.settled_readings >= SETTLED_ENOUGH
        or state.status.ticks - state.held.ticks >= SETTLE_LIMIT_TICKS
    )


def _judge_resistance(state: State, at_ms: int) -> tuple[Event, ...]:
    """At rest, with a settled reading: add the turns still missing, or say how many are too many."""
    started = state.started
    assert started is not None and state.estimate is not None
    target = started.target
    cpt = started.setup.counts_per_turn
    missing = missing_turns(state.estimate, state.turns, target.value)
    more = round(missing.turns)
    room = target.max_turns - round(state.turns)
    allowed = missing_turns(state.estimate, state.turns, target.value * (1.0 + target.tolerance_pct / 100.0))
    worth = max(1, round(WORTH_A_START * (allowed.turns - missing.turns)))
    if more >= worth and room >= 1 and state.top_ups < MOST_TOP_UPS:
        more = min(more, room)
        finish = finish_at(state.estimate, state.turns + more)
        words = f"{_turns(more)} missing after the settled reading"
        return (StopPointChosen(at_ms, state.count + more * cpt, words, finish.ohm, finish.sd),)
    if more >= worth and room < 1:
        return (
            _finished(state, at_ms, "finished", f"the most turns allowed are wound; {_turns(more)} missing"),
        )
    met = _finished(state, at_ms, "finished", "the target is met")
    if more <= -1 and met.verdict != "within":
        words = f"unwind {-more} ± {max(1, round(1.96 * missing.sd))} turns to meet the target"
        return (replace(met, reason=words),)
    return (met,)


def _turns(n: int) -> str:
    return "1 turn" if n == 1 else f"{n} turns"


def _finished(state: State, at_ms: int, outcome: str, reason: str) -> CoilFinished:
    started = state.started
    assert started is not None and state.estimate is not None
    turns = state.turns
    finish = so_far(state.estimate, turns)
    u95 = (finish.high - finish.low) / 2.0
    target = started.target
    if target.kind == "turns":
        low = high = turns
    else:
        low, high = finish.low, finish.high
    judged = (
        verdict(low, high, target.value, target.tolerance_pct)
        if outcome == "finished" and (target.kind == "turns" or started.readings_mode != "none")
        else "not judged"
    )
    return CoilFinished(at_ms, outcome, reason, state.count, turns, finish.ohm, u95, judged)
