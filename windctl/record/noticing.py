"""What the board's words amount to: it began to turn, came to rest, tripped, was turned back by hand;
and the readings give cause for an alarm."""

from __future__ import annotations

from windctl.forecast.alarm import find_alarm
from windctl.plan.experience.reel import runs_out
from windctl.plan.experience.supply import Left
from windctl.protocol.messages import State as BoardState
from windctl.record.events import AlarmRaised, Event, Held, HoldRequested, Tripped, Unwound, WentOn
from windctl.record.state import Fit, State

NO_USE_GOING_ON = ("open", "short")  # every further turn would be wound on a coil that is broken already


def noticed(state: State, at_ms: int) -> tuple[Event, ...]:
    """The next fact that the latest status implies, if there is one."""
    status = state.status
    if status is None:
        return ()
    ours = state.fit is Fit.SAME or state.consented_since_greeting or state.pass_agreed is not None
    if status.state == BoardState.TRIPPED and state.tripped is None and ours:
        return (Tripped(at_ms, status.count, status.trip),)
    if status.state == BoardState.TURNING and not state.turning and state.consented_since_greeting:
        return (WentOn(at_ms, status.count),)
    came_to_rest = state.turning or (state.fit is Fit.SAME and state.held is None)
    if came_to_rest and state.standing:
        return (Held(at_ms, status.ticks, status.count, status.cause),)
    if state.read_last and state.estimate is not None:
        found = find_alarm(state.estimate)
        if found is not None and found.kind in NO_USE_GOING_ON and state.check is not None:
            found = None  # the contact is being put to the wire by hand
        if found is not None and (state.alarm is None or state.alarm.alarm != found.kind):
            raised = AlarmRaised(at_ms, state.turns, found.kind, found.text, found.odds or 0.0)
            if found.kind in NO_USE_GOING_ON and state.turning and state.hold is None:
                return (raised, HoldRequested(at_ms, "windctl", found.text))
            return (raised,)
    short = _spool_runs_out(state, at_ms)
    if short is not None:
        return (short,)
    if _unwound(state) and state.held is not None:
        return (Unwound(at_ms, state.held.count, status.count),)
    return ()


def _spool_runs_out(state: State, at_ms: int) -> AlarmRaised | None:
    """Told once in a coil, while it turns, or beforehand where nobody sees it turn: more likely than not the
    spool ends before the stop point."""
    started = state.started
    assert started is not None
    if state.spool_told or not (state.turning or state.by_eye) or state.alarm is not None:
        return None
    if state.stop_point is None or started.basis is None:
        return None
    left, sd = started.spool_left_m, started.spool_left_sd_m
    if left is None or sd is None:
        return None
    metres = started.basis.coil.wire_length_m(state.stop_point / state.counts_per_turn)
    chance = runs_out(Left(left, sd), metres)
    if chance <= 0.5:
        return None
    text = (
        f"the spool is likely to run out before the stop: about {max(left, 0.0):.0f} m were on it, give or "
        f"take {2.0 * sd:.0f} m, and the coil takes {metres:.0f} m; have the next spool ready to be joined on"
    )
    return AlarmRaised(at_ms, state.turns, "spool", text, min(chance / max(1.0 - chance, 1e-6), 1e6))


def _unwound(state: State) -> bool:
    """Somebody who turned the spindle back by more than a jolt now wants to go on from there."""
    held = state.held
    return (
        held is not None
        and state.consent is not None
        and state.fit is Fit.SAME
        and held.count - state.count > state.counts_per_turn // 2
    )
