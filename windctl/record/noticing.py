"""What the board's words amount to: it began to turn, came to rest, tripped, was turned back by hand."""

from __future__ import annotations

from windctl.protocol.messages import State as BoardState
from windctl.record.events import Event, Held, Tripped, Unwound, WentOn
from windctl.record.state import Fit, State


def noticed(state: State, at_ms: int) -> tuple[Event, ...]:
    """The next fact that the latest status implies, if there is one."""
    status = state.status
    if status is None:
        return ()
    ours = state.fit is Fit.SAME or state.consented_since_greeting
    if status.state == BoardState.TRIPPED and state.tripped is None and ours:
        return (Tripped(at_ms, status.count, status.trip),)
    if status.state == BoardState.TURNING and not state.turning and state.consented_since_greeting:
        return (WentOn(at_ms, status.count),)
    came_to_rest = state.turning or (state.fit is Fit.SAME and state.held is None)
    if came_to_rest and state.standing:
        return (Held(at_ms, status.ticks, status.count, status.cause),)
    if _unwound(state) and state.held is not None:
        return (Unwound(at_ms, state.held.count, status.count),)
    return ()


def _unwound(state: State) -> bool:
    """Somebody who turned the spindle back by more than a jolt now wants to go on from there."""
    held = state.held
    return (
        held is not None
        and state.consent is not None
        and state.fit is Fit.SAME
        and held.count - state.count > state.counts_per_turn // 2
    )
