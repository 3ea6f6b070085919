"""An alarm changes nothing by itself, but one for an open coil tells where the wire broke."""

from __future__ import annotations

from dataclasses import replace

from windctl.record.events import AlarmRaised
from windctl.record.state import State


def raised(state: State, event: AlarmRaised) -> State:
    """The alarm stands until somebody consents to go on."""
    opened = event.alarm == "open" and state.estimate is not None
    near = state.estimate.turn if opened and state.estimate else state.broke_near
    told = state.spool_told or event.alarm == "spool"
    return replace(state, alarm=event, broke_near=near, spool_told=told)
