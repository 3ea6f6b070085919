"""The coil taken up by another run, and where it is to stop."""

from __future__ import annotations

from dataclasses import replace

from windctl.record.events import StopPointChosen
from windctl.record.folding import board, dry_pass, zeroing
from windctl.record.state import State


def resumed(state: State) -> State:
    """Whatever somebody wanted of the run before is void."""
    voided = zeroing.ended(dry_pass.ended(state))
    return board.gone(replace(voided, hold=None, end=None, hands=None, link_lost=None))


def stop_point_chosen(state: State, event: StopPointChosen) -> State:
    """One that is chosen where the coil stood at the last one tops the coil up."""
    at_stop = state.stop_point is not None and state.count >= state.stop_point
    return replace(
        state,
        stop_point=event.count,
        stop_choices=state.stop_choices + 1,
        top_ups=state.top_ups + (1 if at_stop and (state.by_eye or state.held is not None) else 0),
    )
