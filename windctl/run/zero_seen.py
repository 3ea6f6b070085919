"""What is to be seen of a zeroing of the contact: its reading as it comes, its result, and the profile's."""

from __future__ import annotations

from dataclasses import dataclass
from math import isfinite

from windctl.forecast.finish import Z95
from windctl.forecast.zeroing import most_leads_ohm
from windctl.numbers import ohm
from windctl.record.state import State
from windctl.record.zeroing import ENOUGH, has_contact, may_zero, why_refused

BACK_ON_THE_WIRE = "put the contact back on the wire"
PUT_TOGETHER = "put the contact and the meter's other lead together, nothing between them"


@dataclass(frozen=True, slots=True)
class ZeroSeen:
    """Leads and contact, ohm; `u95` are 95 % half-widths. None is "not known".

    `now` is the last reading, inf for an open contact; `read` of `enough` count so far.
    """

    can: bool  # a zeroing may be asked for now
    wanted: bool  # it is under way
    together: bool  # and the leads were said to be together
    now: float | None
    read: int
    enough: int
    most: float  # more cannot be leads
    profile: float
    profile_u95: float
    found: float | None  # what was zeroed, and is taken off
    found_u95: float | None
    refused: str  # why the last attempt came to nothing
    contact_off: bool  # the contact is still to be put back on the wire


def zero_seen(state: State) -> ZeroSeen | None:
    """None where the board has no contact for this coil, and once it may have turned."""
    started, zero, done = state.started, state.zero, state.zeroed
    if started is None or state.let_go or not has_contact(state):
        return None
    return ZeroSeen(
        can=zero is None and may_zero(state),
        wanted=zero is not None,
        together=zero is not None and zero.since is not None,
        now=None if zero is None else zero.now,
        read=0 if zero is None else len(zero.ohms),
        enough=ENOUGH,
        most=most_leads_ohm(started.prior),
        profile=started.prior.offset_ohm,
        profile_u95=Z95 * started.prior.offset_sd,
        found=None if done is None else done.ohm,
        found_u95=None if done is None else Z95 * done.sd_ohm,
        refused="" if zero is None or zero.refused is None else why_refused(zero.refused),
        contact_off=state.contact_off,
    )


def says_zero(state: State) -> str:
    """What is happening to the leads, in plain words."""
    zero = state.zero
    assert zero is not None
    if not state.drives_off:
        return "the drives go off, then the contact is zeroed"
    if zero.since is not None:
        return f"the leads are read: {now_words(zero.now)}, {len(zero.ohms)} of {ENOUGH}"
    if zero.refused is not None:
        return f"{why_refused(zero.refused)}; then say so again"
    return PUT_TOGETHER


def now_words(now: float | None) -> str:
    """A reading of the contact as it is."""
    if now is None:
        return "nothing yet"
    return f"{fine(now)} now" if isfinite(now) else "open"


def fine(value: float) -> str:
    """Leads have parts of an ohm; what is more is none of theirs."""
    return f"{value:.2f} ohm" if value < 100.0 else ohm(value)


def found_words(seen: ZeroSeen) -> str:
    """The result, and the profile's figure beside it; empty where nothing was zeroed."""
    if seen.found is None or seen.found_u95 is None:
        return ""
    surer = "" if seen.found_u95 <= seen.profile_u95 else ", which is the surer"
    return (
        f"leads and contact: {ohm(seen.found, seen.found_u95)}, taken off from now on; the profile says "
        f"{ohm(seen.profile, seen.profile_u95)}{surer}"
    )
