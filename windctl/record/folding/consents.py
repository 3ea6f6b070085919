"""What a consent lifts: the hold, the hands at the wire, the refusal and the alarm before it."""

from __future__ import annotations

from dataclasses import replace

from windctl.record.events import GoGiven
from windctl.record.state import State


def go_given(state: State, event: GoGiven) -> State:
    """From now on the spindle may have turned for this coil."""
    return replace(
        state,
        consent=event,
        consented_since_greeting=True,
        let_go=True,
        zero=None,
        contact_off=False,
        boot=event.boot,
        epoch=event.epoch,
        hold=None,
        hands=None,
        refused=None,
        alarm=None,
        before_typed=None,
    )
