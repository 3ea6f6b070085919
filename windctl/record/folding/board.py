"""What the board says of itself and of commands, and what is left of it where it says nothing more."""

from __future__ import annotations

from dataclasses import replace

from windctl.protocol.messages import (
    Arm,
    Capability,
    ClearTrip,
    Go,
    GuideTo,
    Identity,
    Refused,
    SetDatum,
    Status,
    Trust,
)
from windctl.protocol.messages import State as BoardState
from windctl.record.fitting import fit_of, kept_guide, same_place
from windctl.record.folding import dry_pass, zeroing
from windctl.record.guide_way import begun_anew, settled
from windctl.record.state import Fit, State, touched


def greeted(state: State, identity: Identity) -> State:
    """A conversation begins, and with it whether the board has this coil in hand. No consent outlives one."""
    if state.pass_agreed is not None:
        state = dry_pass.interrupted(state)
    if state.misplaced and not state.let_go:
        state = _guide_of(state, identity)
    return replace(
        zeroing.anew(state),
        identity=identity,
        status=None,
        fit=fit_of(state, identity),
        consent=None,
        consented_since_greeting=False,
        clear=None,
        refused=None,
        before_typed=None,
        counter=None,
        doubted=None,
        link_lost=None,
        guide_known=kept_guide(state, identity),
    )


def _guide_of(state: State, identity: Identity) -> State:
    """Of a coil whose dry pass was broken off: the board still knows where it brought the guide, or somebody
    has to put it to its start. At another simulated machine it is put there."""
    if same_place(state, identity):
        return replace(state, shown=settled(state.shown, identity.guide, identity.epoch))
    if identity.capabilities & Capability.VIRTUAL:
        return replace(state, misplaced=False, shown=begun_anew(state.shown, shift=0))
    return dry_pass.lost(state)


def status_heard(state: State, status: Status) -> State:
    """The board's count is the coil's only while the board has this coil in hand."""
    if state.fit is Fit.SAME and status.boot != state.boot:
        return replace(gone(state), status=status)  # it has started again and counts from nothing
    tripped = state.tripped if status.state == BoardState.TRIPPED else None
    guide_known = state.guide_known and bool(status.trust & Trust.GUIDE)
    if state.fit is Fit.SAME:
        return touched(
            state,
            {
                "status": status,
                "tripped": tripped,
                "guide_known": guide_known,
                "count": status.count,
                "next": status.next,
                "boot": status.boot,
                "epoch": status.epoch,
                "fresh_reading": False,
                "read_last": False,
            },
        )
    # The board may still stand where another coil left it, or where this one does not stand any more.
    count, board_count = state.count, state.board_count
    if board_count is not None:  # turned by hand since the turn was corrected under it
        unpowered = status.state in (BoardState.DRIVES_OFF, BoardState.TRIPPED)
        count += status.count - board_count if unpowered else 0
        board_count = status.count if unpowered else None
    now = touched(
        state,
        {
            "status": status,
            "tripped": tripped,
            "guide_known": guide_known,
            "count": count,
            "board_count": board_count,
            "fresh_reading": False,
            "read_last": False,
        },
    )
    return dry_pass.heard(now)


def refused(state: State, word: Refused) -> State:
    """A consent that the board declined is spent: another needs another word from a person."""
    if word.command in (Arm.CODE, Go.CODE, GuideTo.CODE, SetDatum.CODE):
        return replace(dry_pass.ended(state), refused=word, consent=None)
    if word.command == ClearTrip.CODE:
        return replace(state, refused=word, clear=None)
    return replace(state, refused=word)


def gone(state: State) -> State:
    """Nothing is known of the board until it is greeted again."""
    return replace(
        state,
        identity=None,
        status=None,
        fit=Fit.UNKNOWN,
        consent=None,
        consented_since_greeting=False,
        clear=None,
        turning=False,
        before_typed=None,
    )
