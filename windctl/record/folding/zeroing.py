"""A zeroing of the contact: its readings, and what becomes of it. They never count for the coil."""

from __future__ import annotations

from dataclasses import replace
from math import inf

from windctl.forecast import zeroing as forecast
from windctl.protocol.messages import Reading, ReadingFlag
from windctl.record.events import ContactZeroed, ZeroRefused
from windctl.record.state import State, Zeroing, touched
from windctl.record.zeroing import ENOUGH, SETTLE_TICKS


def together(state: State) -> State:
    """What is read from now on is the leads."""
    if state.zero is None:
        return state
    since = 0 if state.status is None else state.status.ticks
    return replace(state, zero=Zeroing(state.zero.wanted, since, state.zero.now), contact_off=True)


def heard(state: State, zero: Zeroing, raw: Reading, contact_scale: int) -> State:
    """A reading while the contact is to be zeroed: to be seen, and to count once the leads are together."""
    opened = bool(raw.flags & ReadingFlag.OPEN)
    ohm = inf if opened else raw.value * contact_scale / 16_000.0
    ohms, opens = zero.ohms, zero.opens
    settled = zero.since is not None and raw.ticks - raw.window - zero.since >= SETTLE_TICKS
    if opened:
        ohms, opens = (), opens + settled  # whoever holds them lost them: from the beginning
    elif settled and not raw.flags & ReadingFlag.TURNING:
        ohms, opens = (*ohms[1 - ENOUGH :], ohm), 0
    return touched(state, {"zero": Zeroing(zero.wanted, zero.since, ohm, ohms, opens, zero.refused)})


def zeroed(state: State, event: ContactZeroed) -> State:
    """Taken off from now on; another one would take its place."""
    estimate = state.estimate
    if estimate is not None:
        estimate = forecast.zeroed(estimate, event.ohm, event.sd_ohm)
    return replace(state, estimate=estimate, zero=None, zeroed=event)


def refused(state: State, event: ZeroRefused) -> State:
    """The leads may be put together again."""
    if state.zero is None:
        return state
    return replace(state, zero=Zeroing(state.zero.wanted, now=state.zero.now, refused=event))


def anew(state: State) -> State:
    """The board was greeted again: the leads are to be said together once more."""
    return state if state.zero is None else replace(state, zero=Zeroing(state.zero.wanted))


def ended(state: State) -> State:
    """Not zeroed, or no more than before."""
    return state if state.zero is None else replace(state, zero=None)
