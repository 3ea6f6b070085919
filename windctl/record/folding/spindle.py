"""The spindle began to turn, or was stopped for safety."""

from __future__ import annotations

from dataclasses import replace

from windctl.protocol.messages import Trip, Trust
from windctl.record.events import Tripped
from windctl.record.folding import board, dry_pass
from windctl.record.state import Fit, State


def went_on(state: State) -> State:
    """A board that turns for this coil has it in hand; its latest status counts again, read so."""
    moving = replace(
        state,
        fit=Fit.SAME,
        turning=True,
        held=None,
        corrected=None,
        board_count=None,
        guide_known=True,
        misplaced=False,
        broke_near=None,
        settled_readings=0,
        check=None,
        typed=False,
    )
    return moving if state.status is None else board.status_heard(moving, state.status)


def tripped(before: State, event: Tripped) -> State:
    """A trip for low tension comes with the turn that was short of it, so the wire broke about one before."""
    state = dry_pass.interrupted(before)
    if before.pass_agreed is not None and before.status is not None and not before.status.trust & Trust.GUIDE:
        state = dry_pass.lost(state)
    low = event.trip == Trip.TENSION_LOW
    near = max(0.0, event.count / state.counts_per_turn - 1.0) if low else None
    return replace(state, tripped=event, consent=None, broke_near=near)
