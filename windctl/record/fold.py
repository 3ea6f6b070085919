"""state' = fold(state, event): what is known of a coil after each fact.

The state is small and stays so, however long the coil: the latest words of the board, the estimate, the
consents that still count, and a few counters. Nothing here decides anything; `windctl.record.decide` does.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

from windctl.forecast.estimator import begin, update
from windctl.forecast.reading import Reading as CoilReading
from windctl.protocol.messages import (
    Arm,
    ClearTrip,
    Go,
    Identity,
    ReadingFlag,
    Refused,
    Status,
    Trust,
)
from windctl.protocol.messages import State as BoardState
from windctl.protocol.wants import Permission
from windctl.record.events import (
    BoardGreeted,
    ClearGiven,
    CoilFinished,
    CoilStarted,
    CommandRefused,
    CountCorrected,
    EndRequested,
    Event,
    GoGiven,
    Held,
    HoldRequested,
    LinkLost,
    NoteMade,
    ReadingTaken,
    Resumed,
    StatusHeard,
    StopPointChosen,
    Tripped,
    WentOn,
)
from windctl.record.state import Fit, State, setup_crc

__all__ = ["SETTLE_TICKS", "Fit", "State", "fold", "replay", "setup_crc", "start"]

# A reading at rest counts as settled when its whole window lies this long after the spindle stood.
SETTLE_TICKS = 500


def start() -> State:
    """The state before the first fact."""
    return State()


def fold(state: State, event: Event) -> State:
    """The state after one more fact."""
    match event:
        case StatusHeard():
            return _status(state, event.status)
        case ReadingTaken():
            return _reading(state, event)
        case CoilStarted():
            return replace(state, started=event, estimate=begin(event.prior))
        case Resumed():
            return _link_gone(replace(state, hold=None, end=None, link_lost=None))
        case BoardGreeted():
            return replace(
                state,
                identity=event.identity,
                status=None,
                fit=_fit(state, event.identity),
                consent=None,
                consented_since_greeting=False,
                clear=None,
                refused=None,
                link_lost=None,
            )
        case GoGiven():
            return replace(
                state,
                consent=event,
                consented_since_greeting=True,
                let_go=True,
                boot=event.boot,
                epoch=event.epoch,
                hold=None,
                refused=None,
            )
        case ClearGiven():
            return replace(state, clear=Permission(event.boot, event.epoch), refused=None)
        case HoldRequested():
            return replace(state, hold=event, consent=None)
        case EndRequested():
            return replace(state, end=event, consent=None)
        case StopPointChosen():
            return replace(
                state,
                stop_point=event.count,
                stop_choices=state.stop_choices + 1,
                top_ups=state.top_ups + (1 if state.held is not None else 0),
            )
        case WentOn():
            moving = replace(state, fit=Fit.SAME, turning=True, held=None, corrected=None, settled_readings=0)
            return moving if state.status is None else _status(moving, state.status)
        case Held():
            return replace(state, turning=False, held=event, settled_readings=0)
        case Tripped():
            return replace(state, tripped=event, consent=None)
        case LinkLost():
            return _link_gone(replace(state, link_lost=event))
        case CountCorrected():
            cpt = state.counts_per_turn
            return replace(
                state, fit=Fit.CORRECTED, corrected=event, count=round(event.turn * cpt), held=None
            )
        case CommandRefused():
            return _refused(state, event.refused)
        case CoilFinished():
            return replace(state, finished=event, consent=None)
        case NoteMade():
            return state


def replay(events: Iterable[Event], state: State | None = None) -> State:
    """The state after all of `events`."""
    state = start() if state is None else state
    for event in events:
        state = fold(state, event)
    return state


def _fit(state: State, identity: Identity) -> Fit:
    """A board that was never reset for another coil, and stands where this one can stand, has it in hand."""
    if not state.let_go or state.started is None:
        return Fit.FRESH
    setup = state.started.setup
    same = (
        identity.boot == state.boot
        and identity.trust == Trust.COUNT | Trust.GUIDE
        and identity.coil_token == setup.coil_token
        and identity.setup_crc == setup_crc(state.started)
        and identity.program == state.started.program_id
        and (identity.epoch - state.epoch) & 0xFFFF < 0x8000
        and state.count <= identity.count <= state.started.total_counts
        and identity.next >= state.next
    )
    return Fit.SAME if same else Fit.LOST


def _refused(state: State, refused: Refused) -> State:
    """A consent that the board declined is spent: another needs another word from a person."""
    if refused.command in (Arm.CODE, Go.CODE):
        return replace(state, refused=refused, consent=None)
    if refused.command == ClearTrip.CODE:
        return replace(state, refused=refused, clear=None)
    return replace(state, refused=refused)


def _status(state: State, status: Status) -> State:
    tripped = state.tripped if status.state == BoardState.TRIPPED else None
    if state.fit is not Fit.SAME:  # the board may still stand where another coil left it
        return replace(state, status=status, tripped=tripped, fresh_reading=False)
    return replace(
        state,
        status=status,
        tripped=tripped,
        count=status.count,
        next=status.next,
        boot=status.boot,
        epoch=status.epoch,
        fresh_reading=False,
    )


def _reading(state: State, event: ReadingTaken) -> State:
    """Only readings of this coil teach: not before it turned, not through an open contact."""
    raw = event.reading
    if state.started is None or state.identity is None or state.estimate is None or state.fit is not Fit.SAME:
        return state
    if raw.flags & ReadingFlag.OPEN or raw.count <= 0:
        return replace(state, readings_gated=state.readings_gated + 1)
    resting = not raw.flags & ReadingFlag.TURNING
    reading = CoilReading(
        turn=raw.count / state.counts_per_turn,
        ohm=raw.value * state.identity.contact_scale / 16_000.0,
        celsius=raw.celsius / 100.0,
        resting=resting,
        seconds=raw.ticks / 1000.0,
    )
    settled = resting and state.held is not None and raw.ticks - raw.window - state.held.ticks >= SETTLE_TICKS
    if resting and not settled:
        return replace(state, reading=reading)
    estimate, used = update(state.estimate, reading)
    return replace(
        state,
        estimate=estimate,
        reading=reading,
        fresh_reading=used,
        readings_used=state.readings_used + used,
        readings_gated=state.readings_gated + (not used),
        settled_readings=state.settled_readings + (1 if settled and used else 0),
    )


def _link_gone(state: State) -> State:
    return replace(
        state,
        identity=None,
        status=None,
        fit=Fit.UNKNOWN,
        consent=None,
        consented_since_greeting=False,
        clear=None,
        turning=False,
    )
