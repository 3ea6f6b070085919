"""What the board's words amount to: it began to turn, came to rest, tripped."""

from __future__ import annotations

from windctl.protocol.messages import State as BoardState
from windctl.record.events import Event, Held, Tripped, WentOn
from windctl.record.state import Fit, State


def noticed(state: State, at_ms: int) -> tuple[Event, ...]:
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
    return ()
