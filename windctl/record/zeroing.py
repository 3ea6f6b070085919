"""Zeroing the contact: before the first turn its leads are put together, read, and taken off from then on.

With no turn on the bobbin a contact on the wire reads hardly more than its leads, so no reading can tell that
they are together: a person says so. Nothing is powered meanwhile, and nothing asks for a go.
"""

from __future__ import annotations

from windctl.forecast.zeroing import LEAST_READINGS, leads_of, most_leads_ohm
from windctl.numbers import ohm
from windctl.protocol.messages import Capability
from windctl.record.events import ContactZeroed, Event, ZeroEnded, ZeroRefused
from windctl.record.state import State

ENOUGH = LEAST_READINGS
SETTLE_TICKS = 500  # after it was said that the leads are together: hands that put them together still move
LIMIT_TICKS = 20_000  # for a hand that holds them, before it is told that this comes to nothing

NOBODY = "nobody at this simulated machine can put the contact's leads together"


def may_zero(state: State) -> bool:
    """Nothing has turned for this coil yet, a contact of the board's reads it, no guide is being shown."""
    return has_contact(state) and not state.let_go and state.count == 0 and state.pass_agreed is None


def has_contact(state: State) -> bool:
    """The board's own contact reads this coil."""
    return state.started is not None and bool(state.started.setup.fitted & Capability.CONTACT)


def nobody_there(state: State, simulated_hand: bool) -> bool:
    """A simulated machine where nobody can put leads together, as far as is known yet."""
    identity = state.identity
    return identity is not None and bool(identity.capabilities & Capability.VIRTUAL) and not simulated_hand


def waits_for_leads(state: State) -> bool:
    """Hands may go in, and nobody has said yet that the leads are together."""
    return state.zero is not None and state.zero.since is None and state.drives_off


def zero_follows(state: State, at_ms: int) -> tuple[Event, ...]:
    """What the readings of the leads come to, once there are enough of them, or time is over."""
    zero, started, status = state.zero, state.started, state.status
    if zero is None or started is None or status is None:
        return ()
    if nobody_there(state, zero.wanted.simulated_hand):
        return (ZeroEnded(at_ms, "windctl", NOBODY),)
    if zero.since is None or not state.drives_off:
        return ()
    most = most_leads_ohm(started.prior)
    if zero.opens >= ENOUGH:
        return (ZeroRefused(at_ms, "open", 0.0, most),)
    if len(zero.ohms) >= ENOUGH:
        leads = leads_of(zero.ohms, started.prior.floor_ohm)
        if leads.ohm > most:
            return (ZeroRefused(at_ms, "too much", leads.ohm, most),)
        if leads.steady:
            return (ContactZeroed(at_ms, leads.ohm, leads.sd, len(zero.ohms), zero.wanted.by),)
    if status.ticks - zero.since >= LIMIT_TICKS:
        why = "unsteady" if zero.ohms else "silent"
        return (ZeroRefused(at_ms, why, zero.ohms[-1] if zero.ohms else 0.0, most),)
    return ()


def why_refused(event: ZeroRefused) -> str:
    """What was read, what is allowed, and what to do."""
    if event.why == "open":
        return "the contact reads open: press its leads together, look at them and their plug"
    if event.why == "too much":
        return (
            f"{ohm(event.ohm)} were read, and by the profile leads and contact have {ohm(event.most_ohm)} "
            "at the most: take away what is between them and clean the contact; where leads really have so "
            "much, put it into the profile as readings.lead_ohm"
        )
    seconds = LIMIT_TICKS // 1000
    if event.why == "unsteady":
        return f"the reading did not settle within {seconds} s: hold the leads still, clean the contact"
    return f"no steady reading came within {seconds} s: look at the contact, its leads and the board"
