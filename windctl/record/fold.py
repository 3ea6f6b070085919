"""state' = fold(state, event): what is known of a coil after each fact.

The state is small and stays so, however long the coil: the latest words of the board, the estimate, the
consents that still count, and a few counters. Nothing here decides anything; `windctl.record.decide` does.

What takes more than a line stands in `windctl.record.folding`, by the subject of the fact.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

from windctl.forecast.estimator import begin
from windctl.protocol.wants import Permission
from windctl.record.events import (
    AlarmRaised,
    BoardGreeted,
    CheckAsked,
    CheckTaken,
    ClearGiven,
    CoilFinished,
    CoilStarted,
    CommandRefused,
    ContactZeroed,
    CountCorrected,
    CounterRead,
    EndRequested,
    Event,
    GoGiven,
    GuideNudged,
    GuideSeen,
    HandsAsked,
    Held,
    HoldRequested,
    LeadsTogether,
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
    ZeroEnded,
    ZeroRefused,
    ZeroWanted,
)
from windctl.record.folding import (
    alarms,
    board,
    checks,
    consents,
    count,
    course,
    dry_pass,
    readings,
    spindle,
    wire,
    zeroing,
)
from windctl.record.state import Fit, State, Zeroing, setup_crc
from windctl.record.taking_back import taken_back

__all__ = ["Fit", "State", "fold", "replay", "setup_crc", "start"]


def start() -> State:
    """The state before the first fact."""
    return State()


def fold(state: State, event: Event) -> State:
    """The state after one more fact."""
    match event:
        # Twenty times a second, so first.
        case StatusHeard():
            return board.status_heard(state, event.status)
        case ReadingTaken():
            return readings.taken(state, event)

        case CoilStarted():
            return replace(state, started=event, estimate=begin(event.prior))
        case Resumed():
            return course.resumed(state)
        case StopPointChosen():
            return course.stop_point_chosen(state, event)
        case CoilFinished():
            return replace(state, finished=event, consent=None)

        case BoardGreeted():
            return board.greeted(state, event.identity)
        case CommandRefused():
            return board.refused(state, event.refused)
        case LinkLost():
            return board.gone(replace(zeroing.ended(dry_pass.ended(state)), link_lost=event))

        case WentOn():
            return spindle.went_on(state)
        case Held():
            return replace(state, turning=False, held=event, settled_readings=0, typed=False)
        case Tripped():
            return spindle.tripped(state, event)

        case CountCorrected():
            return count.corrected(state, event)
        case CounterRead():
            return count.counter_read(state, event)
        case Unwound():
            return count.unwound(state, event)

        case GoGiven():
            return consents.go_given(state, event)
        case ClearGiven():
            return replace(state, clear=Permission(event.boot, event.epoch), refused=None)

        case HoldRequested():
            return replace(zeroing.ended(dry_pass.ended(state)), hold=event, consent=None)
        case EndRequested():
            return replace(zeroing.ended(dry_pass.ended(state)), end=event, consent=None)
        case HandsAsked():
            return replace(state, hands=event, consent=None)
        case PaceAsked():
            return replace(state, pace_percent=event.percent)

        case ZeroWanted():
            return replace(state, zero=Zeroing(event))
        case LeadsTogether():
            return zeroing.together(state)
        case ContactZeroed():
            return zeroing.zeroed(state, event)
        case ZeroRefused():
            return zeroing.refused(state, event)
        case ZeroEnded():
            return zeroing.ended(state)

        case PassWanted():
            return replace(state, pass_wanted=True)
        case PassAgreed():
            return dry_pass.agreed(state, event)
        case GuideNudged():
            return dry_pass.nudged(state, event)
        case GuideSeen():
            return dry_pass.guide_seen(state, event)

        case WireBroke():
            return replace(state, broke=event)
        case Spliced():
            return wire.spliced(state, event)
        case WireChanged():
            return wire.changed(state, event)

        case ReadingTyped():
            return readings.typed(state, event)
        case ReadingTakenBack():
            return taken_back(state)
        case CheckAsked():
            return replace(state, check=event)
        case CheckTaken():
            return checks.taken(state, event)
        case AlarmRaised():
            return alarms.raised(state, event)
        case NoteMade():
            return state


def replay(events: Iterable[Event], state: State | None = None) -> State:
    """The state after all of `events`."""
    state = start() if state is None else state
    for event in events:
        state = fold(state, event)
    return state
