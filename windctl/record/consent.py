"""Who has consented to what, and what only a person can give next."""

from __future__ import annotations

from windctl.numbers import at_turn
from windctl.protocol.messages import (
    Arm,
    Capability,
    Cause,
    ClearTrip,
    Go,
    GuideTo,
    InputBit,
    Refusal,
    Refused,
    SetDatum,
    Trip,
    Trust,
)
from windctl.protocol.messages import State as BoardState
from windctl.protocol.wants import Permission
from windctl.record.dry_pass import agreed, arrived, may_pass, nobody_agreed
from windctl.record.events import Event, GoGiven
from windctl.record.state import Fit, State
from windctl.record.taking_back import second_thoughts
from windctl.record.zeroing import waits_for_leads

PATIENCE_TICKS = 30_000  # for a simulated contact, before somebody is asked

# Commands whose refusal a person should hear of: they had agreed to something that then did not happen.
_TOLD = (Arm.CODE, Go.CODE, GuideTo.CODE, SetDatum.CODE, ClearTrip.CODE)


def follows_from_consent(state: State, at_ms: int) -> tuple[Event, ...]:
    """The starts that follow from a consent already given: after powering the drives, or by the pedal."""
    status, permission = state.status, state.permission
    if status is None or permission is None:
        return ()
    if not _powered_by_consent(state):
        return ()
    if _pedal_fitted(state) and not status.inputs & InputBit.PEDAL_DOWN:
        return ()
    by = "pedal" if _pedal_fitted(state) else "consent"
    return (GoGiven(at_ms, permission.boot, permission.epoch, by),)


def _powered_by_consent(state: State) -> bool:
    """Exactly the powering that was consented to has happened since the consent, and nothing else."""
    consent, status = state.consent, state.status
    return (
        consent is not None
        and status is not None
        and status.state == BoardState.READY
        and status.cause == Cause.ARM
        and status.boot == consent.boot
        and status.epoch == (consent.epoch + 1) & 0xFFFF
    )


def _pedal_fitted(state: State) -> bool:
    assert state.started is not None
    return bool(state.started.setup.fitted & Capability.PEDAL)


def asks(state: State) -> str | None:
    """What only a person can give now: "go", "clear", "leads", "reading", "place", "pass", "look", "count" or
    nothing.

    "count": where the counter is read by eye, the coil is to be wound on and the counter's number typed.
    "leads": before the first turn the contact's leads are to be put together, to be read by themselves.
    "reading": the coil stands for a check, and hands may go in.
    "pass": the guide is about to move, before the first turn; "look": it stands where it is to be seen.
    "place": the board has lost the count or the guide's place, and a person has to say at which turn the coil
    stands.
    """
    status, permission = state.status, state.permission
    if status is None or permission is None or state.end is not None:
        return None
    if status.state == BoardState.TURNING or not state.standing:
        return None
    if status.state == BoardState.TRIPPED:
        return None if state.clear == permission else "clear"
    if state.zero is not None:
        return "leads" if waits_for_leads(state) else None
    at_stop = state.stop_point is not None and state.count >= state.stop_point
    if state.by_eye and state.check is None:
        return None if at_stop and state.let_go and second_thoughts(state) else "count"
    if state.check is not None:
        return "reading" if state.drives_off and not _contact_may_come(state) else None
    if at_stop and state.held is not None and state.fit is not Fit.CORRECTED:
        return None  # settling
    if state.hands is not None and status.state != BoardState.DRIVES_OFF:
        return None  # the drives are going off
    if _consented(state):
        return None
    if agreed(state) is not None:
        return "look" if arrived(state) else None
    if nobody_agreed(state):
        return None  # the drives are going off
    if (
        state.fit is Fit.FRESH
        and status.state != BoardState.DRIVES_OFF
        and not state.consented_since_greeting
    ):
        return None  # still to be disarmed and set up
    if state.fit is Fit.SAME and status.trust != Trust.COUNT | Trust.GUIDE:
        return "place"
    return "pass" if state.pass_wanted and may_pass(state) else "go"


def _contact_may_come(state: State) -> bool:
    """At a simulated machine the contact is put to the wire as soon as the drives are off."""
    identity, status = state.identity, state.status
    if identity is None or status is None or not identity.capabilities & Capability.VIRTUAL:
        return False
    since = status.ticks - (0 if state.held is None else state.held.ticks)  # 0: it has just started again
    fitted = 0 if state.started is None else state.started.setup.fitted
    return bool(fitted & Capability.CONTACT) and since < PATIENCE_TICKS


def _consented(state: State) -> bool:
    """A consent is on its way to the board: to power the drives, to start, or it waits for the pedal."""
    return given(state) is not None or _powered_by_consent(state)


def given(state: State) -> Permission | None:
    """The consent that counts for the board as it is now."""
    consent = state.consent
    if consent is None or state.permission != Permission(consent.boot, consent.epoch):
        return None
    return state.permission


def blocked(state: State) -> str | None:
    """Why the coil cannot go on by itself, in words."""
    words = None if state.refused is None else declined(state.refused)
    if state.status is not None and state.status.state == BoardState.TRIPPED:
        trip = f"the board is tripped ({Trip(state.status.trip).name.lower().replace('_', ' ')})"
        return trip if words is None else f"{trip}; {words}"
    return words


def declined(refused: Refused) -> str | None:
    """What a person who had agreed to something should hear of its refusal; None: it concerns nobody."""
    if refused.command not in _TOLD:
        return None
    return f"the board refused: {Refusal(refused.why).name.lower().replace('_', ' ')}"


def why_lost(state: State) -> str:
    """Why the board cannot be asked where the coil stands."""
    identity = state.identity
    assert identity is not None and state.started is not None
    if identity.boot != state.boot:
        why = "the board was reset since"
    elif identity.coil_token != state.started.setup.coil_token:
        why = "the board has had another coil since"
    else:
        why = "what the board reports does not go on from the record"
    says = identity.count / state.counts_per_turn
    return f"{why}; the record ends at turn {at_turn(state.turns)}, the board says {at_turn(says)}"
