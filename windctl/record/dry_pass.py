"""A dry pass: before the first turn the guide goes to its far turn-round and back, and is seen right at both.
Where it stands a little off it is nudged, and where it then stands is the place that the program means.

It moves something, so it takes a consent of its own, and whatever else happens to the board ends it. The
guide is then brought back to its start before anything turns. Where the board has lost the guide's place, a
person puts it to its start by hand, and the pass is made anew.
"""

from __future__ import annotations

from windctl.protocol.messages import Capability, Cause
from windctl.protocol.messages import State as BoardState
from windctl.protocol.wants import Permission
from windctl.record.guide_way import FAR, HOME, START
from windctl.record.state import State

__all__ = ["FAR", "HOME", "START", "agreed", "arrived", "goal", "may_pass", "nobody_agreed"]


def may_pass(state: State) -> bool:
    """Nothing has turned for this coil yet, and a motor guides."""
    started = state.started
    fitted = 0 if started is None else started.setup.fitted
    return bool(fitted & Capability.GUIDE_STEP) and not state.let_go and state.count == 0


def agreed(state: State) -> Permission | None:
    """The consent to the pass, while the board is as it was given for, or powered by it and nothing else."""
    given, status = state.pass_agreed, state.status
    if given is None or status is None or status.boot != given.boot:
        return None
    if status.state == BoardState.DRIVES_OFF and status.epoch == given.epoch:
        return Permission(status.boot, status.epoch)
    powered = status.state == BoardState.READY and status.cause == Cause.ARM
    if powered and status.epoch == (given.epoch + 1) & 0xFFFF:
        return Permission(status.boot, status.epoch)
    return None


def goal(state: State) -> int:
    """Where the guide is to be seen next, in motor steps."""
    assert state.started is not None
    return state.started.setup.guide_max if state.shown.end == FAR else 0


def arrived(state: State) -> bool:
    """The guide stands where it is to be seen."""
    status, shown = state.status, state.shown
    return (
        agreed(state) is not None
        and status is not None
        and status.state == BoardState.READY
        and state.standing
        and not shown.way
        and shown.end != HOME
        and status.guide == goal(state)
    )


def nobody_agreed(state: State) -> bool:
    """The drives are powered, and no consent says so: they are to be switched off."""
    return state.powered and not state.let_go and agreed(state) is None
