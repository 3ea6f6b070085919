"""What readings teach the coil's estimate, and which of them."""

from __future__ import annotations

from dataclasses import replace
from math import inf, isfinite

from windctl.forecast.estimator import update
from windctl.forecast.reading import Reading as CoilReading
from windctl.protocol.messages import ReadingFlag
from windctl.record.events import ReadingTaken, ReadingTyped
from windctl.record.folding import zeroing
from windctl.record.state import Fit, State, touched
from windctl.record.taking_back import kept

# A reading at rest counts as settled when its whole window lies this long after the spindle stood.
SETTLE_TICKS = 500


def taken(state: State, event: ReadingTaken) -> State:
    """Only readings of this coil teach: not before it turned, not through an open contact."""
    raw = event.reading
    if state.started is None or state.identity is None or state.estimate is None:
        return state
    if state.zero is not None:
        return zeroing.heard(state, state.zero, raw, state.identity.contact_scale)
    # A board that has started again counts as it was told, and a check waits for its reading all the same.
    told = state.fit is Fit.CORRECTED and state.check is not None and raw.count == state.count
    if raw.count <= 0 or not (state.fit is Fit.SAME or told):
        return state
    if state.broke is not None or state.broke_near is not None:
        return state  # the wire is broken
    if state.hands is not None and state.check is None:
        return state  # somebody is at the wire
    if state.check is not None and raw.flags & ReadingFlag.OPEN:
        return state  # nobody touches the contact yet
    resting = not raw.flags & ReadingFlag.TURNING
    reading = CoilReading(
        turn=raw.count / state.counts_per_turn,
        ohm=inf if raw.flags & ReadingFlag.OPEN else raw.value * state.identity.contact_scale / 16_000.0,
        celsius=raw.celsius / 100.0,
        resting=resting,
        seconds=raw.ticks / 1000.0,
    )
    since = raw.ticks - raw.window - (0 if state.held is None else state.held.ticks)
    settled = resting and (told or (state.held is not None and since >= SETTLE_TICKS))
    shown = reading if isfinite(reading.ohm) else state.reading
    if resting and not settled:
        return replace(state, reading=shown, read_last=True)
    estimate, used = update(state.estimate, reading)
    return touched(
        state,
        {
            "estimate": estimate,
            "reading": shown,
            "fresh_reading": used,
            "read_last": True,
            "readings_used": state.readings_used + used,
            "readings_gated": state.readings_gated + (not used),
            "settled_readings": state.settled_readings + (1 if settled and used else 0),
            "before_typed": None if used else state.before_typed,
        },
    )


def typed(state: State, event: ReadingTyped) -> State:
    """A reading by hand is a settled one. Where the wire lies bare anyway, it saves a check."""
    if state.estimate is None:
        return state
    status = state.status
    reading = CoilReading(
        turn=event.turn,
        ohm=event.ohm,
        celsius=event.celsius,
        resting=True,
        seconds=None if status is None else status.ticks / 1000.0,
    )
    estimate, used = update(state.estimate, reading)
    return replace(
        state,
        estimate=estimate,
        reading=reading,
        fresh_reading=used,
        read_last=state.by_eye or state.read_last,  # nothing else will read this coil
        readings_used=state.readings_used + used,
        readings_gated=state.readings_gated + (not used),
        settled_readings=state.settled_readings + used,
        typed=state.typed or used,
        checks=state.checks + (1 if used and state.check is None else 0),
        before_typed=kept(state),
    )
