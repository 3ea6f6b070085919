"""Whose coil the board has: how what it says of itself goes on from the record."""

from __future__ import annotations

from windctl.protocol.messages import Identity, Trust
from windctl.record.state import Fit, State, setup_crc


def fit_of(state: State, identity: Identity) -> Fit:
    """A board that was never reset for another coil, and stands where this one can stand, has it in hand."""
    if not state.let_go or state.started is None:
        return Fit.FRESH
    if state.by_eye:
        return Fit.CORRECTED  # no board ever knew: the record does, until the counter is read again
    if state.corrected is not None and identity.count != state.count:
        return Fit.LOST  # it was never told the turn that it should now stand at
    same = (
        _kept(state, identity)
        and identity.trust == Trust.COUNT | Trust.GUIDE
        and (identity.epoch - state.epoch) & 0xFFFF < 0x8000
        and state.count <= identity.count <= state.started.total_counts
        and (state.corrected is not None or state.misplaced or identity.next >= state.next)
    )
    return Fit.SAME if same else Fit.LOST


def _kept(state: State, identity: Identity) -> bool:
    """The board was never reset or set up for another coil since it turned for this one."""
    started = state.started
    return (
        started is not None
        and identity.boot == state.boot
        and identity.coil_token == started.setup.coil_token
        and identity.setup_crc == setup_crc(started)
        and identity.program == started.program_id
    )


def same_place(state: State, identity: Identity) -> bool:
    """The board was not reset since somebody consented to move its guide for this coil, and knows where it
    is."""
    return _kept(state, identity) and bool(identity.trust & Trust.GUIDE)


def kept_guide(state: State, identity: Identity) -> bool:
    """The board still knows where it brought the guide for this coil."""
    return state.let_go and same_place(state, identity)
