"""state' = fold(state, event): what is known of a coil after each fact.

The state is small and stays so, however long the coil: the latest words of the board, the estimate, the
consents that still count, and a few counters. Nothing here decides anything; `windctl.record.decide` does.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace
from math import inf, isfinite

from windctl.forecast.estimator import Estimate, begin, update
from windctl.forecast.events import new_wire, recounted, spliced
from windctl.forecast.reading import Reading as CoilReading
from windctl.protocol.messages import (
    Arm,
    Capability,
    ClearTrip,
    Go,
    GuideTo,
    ReadingFlag,
    Refused,
    SetDatum,
    Status,
    Trip,
    Trust,
)
from windctl.protocol.messages import State as BoardState
from windctl.protocol.wants import Permission
from windctl.record.dry_pass import START
from windctl.record.events import (
    AlarmRaised,
    BoardGreeted,
    CheckAsked,
    CheckTaken,
    ClearGiven,
    CoilFinished,
    CoilStarted,
    CommandRefused,
    CountCorrected,
    EndRequested,
    Event,
    GoGiven,
    GuideSeen,
    HandsAsked,
    Held,
    HoldRequested,
    LinkLost,
    NoteMade,
    PaceAsked,
    PassAgreed,
    PassWanted,
    ReadingTaken,
    ReadingTakenBack,
    ReadingTyped,
    Resumed,
    Spliced,
    StatusHeard,
    StopPointChosen,
    Tripped,
    Unwound,
    WentOn,
    WireBroke,
    WireChanged,
)
from windctl.record.fitting import fit_of, kept_guide, same_place
from windctl.record.state import Fit, State, setup_crc, touched
from windctl.record.taking_back import kept, taken_back

__all__ = ["SETTLE_TICKS", "Fit", "State", "fold", "replay", "setup_crc", "start"]

# A reading at rest counts as settled when its whole window lies this long after the spindle stood.
SETTLE_TICKS = 500

# How far off a turn typed by somebody who counted may be.
MISCOUNT_SD_TURNS = 0.5


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
            return _link_gone(replace(_no_pass(state), hold=None, end=None, hands=None, link_lost=None))
        case BoardGreeted():
            return replace(
                state,
                identity=event.identity,
                status=None,
                fit=fit_of(state, event.identity),
                consent=None,
                consented_since_greeting=False,
                clear=None,
                refused=None,
                before_typed=None,
                link_lost=None,
                guide_known=kept_guide(state, event.identity),
                misplaced=state.misplaced and (state.let_go or same_place(state, event.identity)),
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
                hands=None,
                refused=None,
                alarm=None,
                before_typed=None,
            )
        case ClearGiven():
            return replace(state, clear=Permission(event.boot, event.epoch), refused=None)
        case HoldRequested():
            return replace(_no_pass(state), hold=event, consent=None)
        case EndRequested():
            return replace(_no_pass(state), end=event, consent=None)
        case StopPointChosen():
            return replace(
                state,
                stop_point=event.count,
                stop_choices=state.stop_choices + 1,
                top_ups=state.top_ups + (1 if state.held is not None else 0),
            )
        case AlarmRaised():
            opened = event.alarm == "open" and state.estimate is not None
            near = state.estimate.turn if opened and state.estimate else state.broke_near
            told = state.spool_told or event.alarm == "spool"
            return replace(state, alarm=event, broke_near=near, spool_told=told)
        case WentOn():
            return _went_on(state)
        case Held():
            return replace(state, turning=False, held=event, settled_readings=0, typed=False)
        case Tripped():
            return _tripped(state, event)
        case LinkLost():
            return _link_gone(replace(_no_pass(state), link_lost=event))
        case CountCorrected():
            return _corrected(state, event)
        case HandsAsked():
            return replace(state, hands=event, consent=None)
        case WireBroke():
            return replace(state, broke=event)
        case Spliced():
            return _joined(state, None if state.estimate is None else spliced(state.estimate, event.turn))
        case WireChanged():
            joined = _joined(state, None if state.estimate is None else new_wire(state.estimate, event.turn))
            return replace(joined, spool_told=True)
        case CheckAsked():
            return replace(state, check=event)
        case ReadingTyped():
            return _typed(state, event)
        case CheckTaken():
            checks = state.checks + (1 if event.read else 0)
            before = state.before_typed if event.read else None
            return replace(state, check=None, checks=checks, checked_count=state.count, before_typed=before)
        case ReadingTakenBack():
            return taken_back(state)
        case PassWanted():
            return replace(state, pass_wanted=True)
        case PassAgreed():
            return replace(
                state,
                pass_agreed=event,
                seen_far=False,
                boot=event.boot,
                epoch=event.epoch,
                hold=None,
                hands=None,
                refused=None,
            )
        case GuideSeen():
            if event.end != START:
                return replace(state, seen_far=True)
            return replace(state, pass_wanted=False, pass_agreed=None, seen_far=False)
        case PaceAsked():
            return replace(state, pace_percent=event.percent)
        case Unwound():
            held = None if state.held is None else replace(state.held, count=event.count)
            return replace(state, misplaced=_guided(state), held=held, before_typed=None)
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


def _no_pass(state: State) -> State:
    """A dry pass ends where it is; the guide may stand anywhere between its ends."""
    if state.pass_agreed is None:
        return replace(state, pass_wanted=False) if state.pass_wanted else state
    return replace(state, pass_wanted=False, pass_agreed=None, seen_far=False, misplaced=True)


def _guided(state: State) -> bool:
    """The guide has a motor, and the board knows where it is."""
    started = state.started
    fitted = started is not None and bool(started.setup.fitted & Capability.GUIDE_STEP)
    return fitted and state.guide_known


def _went_on(state: State) -> State:
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
    return moving if state.status is None else _status(moving, state.status)


def _tripped(before: State, event: Tripped) -> State:
    """A trip for low tension comes with the turn that was short of it, so the wire broke about one before."""
    state = _no_pass(before)
    low = event.trip == Trip.TENSION_LOW
    near = max(0.0, event.count / state.counts_per_turn - 1.0) if low else None
    return replace(state, tripped=event, consent=None, broke_near=near)


def _corrected(state: State, event: CountCorrected) -> State:
    in_hand, misplaced = state.in_hand, _guided(state)
    estimate = state.estimate
    if event.miscounted and estimate is not None:
        estimate = recounted(estimate, state.turns, event.turn, MISCOUNT_SD_TURNS)
    return replace(
        state,
        fit=Fit.CORRECTED,
        corrected=event,
        count=round(event.turn * state.counts_per_turn),
        held=state.held if in_hand else None,
        board_count=state.status.count if misplaced and state.status is not None else None,
        misplaced=misplaced,
        estimate=estimate,
        before_typed=None,
    )


def _joined(state: State, estimate: Estimate | None) -> State:
    return replace(
        state,
        estimate=estimate,
        broke=None,
        broke_near=None,
        splices=state.splices + 1,
        before_typed=None,
    )


def _refused(state: State, refused: Refused) -> State:
    """A consent that the board declined is spent: another needs another word from a person."""
    if refused.command in (Arm.CODE, Go.CODE, GuideTo.CODE, SetDatum.CODE):
        return replace(_no_pass(state), refused=refused, consent=None)
    if refused.command == ClearTrip.CODE:
        return replace(state, refused=refused, clear=None)
    return replace(state, refused=refused)


def _status(state: State, status: Status) -> State:
    if state.fit is Fit.SAME and status.boot != state.boot:
        return replace(_link_gone(state), status=status)  # it has started again and counts from nothing
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
    return touched(
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


def _reading(state: State, event: ReadingTaken) -> State:
    """Only readings of this coil teach: not before it turned, not through an open contact."""
    raw = event.reading
    if state.started is None or state.identity is None or state.estimate is None:
        return state
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


def _typed(state: State, event: ReadingTyped) -> State:
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
        readings_used=state.readings_used + used,
        readings_gated=state.readings_gated + (not used),
        settled_readings=state.settled_readings + used,
        typed=state.typed or used,
        checks=state.checks + (1 if used and state.check is None else 0),
        before_typed=kept(state),
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
        before_typed=None,
    )
