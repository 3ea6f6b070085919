"""Slower and faster: from the pace that is wanted now to the next one, within what the plan was checked at.
Pure."""

from __future__ import annotations

from windctl.plan.pace import least_percent, most_pace
from windctl.protocol.messages import Capability
from windctl.record.events import PaceAsked
from windctl.record.state import State
from windctl.run.requests import Faster, Slower
from windctl.run.said import Answer

STEP = 10  # per cent of the planned pace


def paced(request: Slower | Faster, state: State, at_ms: int) -> Answer:
    """The fact of another pace, or why there is none."""
    started = state.started
    if started is None or state.finished is not None:
        return Answer(says="there is no coil to be wound slower or faster")
    if not started.setup.fitted & Capability.DRIVE_STEP:
        return Answer(says="the pace is your own motor's: windctl does not drive this spindle")
    now, least = state.pace_percent, least_percent(started.pace)
    if isinstance(request, Slower):
        wanted = max(least, -(-now // STEP) * STEP - STEP)
    else:
        wanted = min(100, now // STEP * STEP + STEP)
    rpm = f"{most_rpm(state, wanted):.0f} rpm"
    if wanted == now:
        limit = "its first turns are no slower" if isinstance(request, Slower) else "that is as planned"
        return Answer(says=f"it stays at {rpm}: {limit}")
    part = "as planned" if wanted == 100 else f"{wanted} % of the planned pace"
    return Answer((PaceAsked(at_ms, wanted, request.by),), f"at most {rpm}, {part}")


def most_rpm(state: State, percent: int) -> float:
    """The pace between the slow turns at `percent` of the planned one."""
    assert state.started is not None
    return most_pace(state.started.pace, percent) * 60.0 / state.started.setup.steps_per_turn
