"""Facts of a run in plain words, for whoever stands at the machine. Pure."""

from __future__ import annotations

from windctl.desk.numbers import apart, duration, grouped, ohm, signed_mm
from windctl.protocol.messages import Cause, Refusal, Trip
from windctl.protocol.rules import NO_BOARD_QUEUE
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
    ReadingTakenBack,
    ReadingTyped,
    Resumed,
    Spliced,
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
from windctl.record.zeroing import why_refused

_CAUSES = {
    Cause.STOP_POINT: "at the stop point",
    Cause.QUEUE_END: "out of program",
}


def tell(event: Event, counts_per_turn: int) -> str | None:
    """One line for one rare fact; None for what goes without saying."""

    def turn(count: int) -> str:
        return grouped(count / counts_per_turn)

    match event:
        case CoilStarted():
            return f"{event.number} begins: {event.recipe_name} on {event.machine}"
        case Resumed():
            return "taken up again"
        case BoardGreeted() if event.identity.queue == NO_BOARD_QUEUE:
            return None
        case BoardGreeted():
            return f"the board answers, at turn {turn(event.identity.count)}"
        case GoGiven():
            return None if event.by == "consent" else f"go, given by {_by(event.by)}"
        case WentOn():
            return f"turns from {turn(event.count)}"
        case Held():
            return f"stands at {turn(event.count)}, {_cause(event.cause)}"
        case HoldRequested():
            return f"hold, asked for by {_by(event.by)}: {event.reason}"
        case EndRequested():
            return f"to be ended here: {event.reason}"
        case ClearGiven():
            return f"trip cleared by {_by(event.by)}"
        case StopPointChosen():
            finish = ohm(event.finish_ohm, 1.96 * event.finish_sd).replace("kohm", "kΩ").replace("ohm", "Ω")
            return f"stop at {turn(event.count)}: {event.reason}; finish {finish}"
        case Tripped():
            return f"tripped at {turn(event.count)}: {_words(Trip(event.trip).name)}"
        case LinkLost():
            return f"the line is gone: {event.reason}"
        case CountCorrected():
            return f"turn set to {grouped(event.turn, 1)} by {_by(event.by)}: {event.reason}"
        case CounterRead():
            if event.doubted:
                return f"the counter at {grouped(event.turn)}? asked about"
            again = ", so the readings before were at a wrong count" if event.recounted else ""
            return f"the counter at {grouped(event.turn)}, read by {_by(event.by)}{again}"
        case CommandRefused():
            return f"the board declined: {_words(Refusal(event.refused.why).name)}"
        case HandsAsked():
            return f"drives off: {event.reason}"
        case WireBroke():
            return f"the wire broke at turn {grouped(event.turn, 1)}"
        case Spliced():
            return f"spliced at turn {grouped(event.turn, 1)}"
        case WireChanged():
            name = f" ({event.spool})" if event.spool else ""
            return f"another spool{name} from turn {grouped(event.turn, 1)} on"
        case CheckAsked():
            gain = f"±{1.96 * event.without_ohm:.0f} to ±{1.96 * event.with_ohm:.0f} Ω"
            return f"to be read at turn {grouped(event.turn)}: the finish from {gain}"
        case ReadingTyped():
            read = f"{ohm(event.ohm)} at {event.celsius:.1f} °C".replace("kohm", "kΩ").replace("ohm", "Ω")
            return f"read at turn {grouped(event.turn)} by {_by(event.by)}: {read}"
        case ReadingTakenBack():
            return f"what was typed last is taken back by {_by(event.by)}"
        case ZeroWanted():
            return "the contact is to be zeroed first"
        case LeadsTogether():
            return f"the contact's leads are together, said by {_by(event.by)}"
        case ContactZeroed():
            found = ohm(event.ohm, 1.96 * event.sd_ohm).replace("ohm", "Ω")
            return f"contact zeroed: {found} are taken off, from {event.readings} readings"
        case ZeroRefused():
            return f"not zeroed: {why_refused(event)}"
        case ZeroEnded():
            return f"the contact is not zeroed: {event.reason}"
        case PassWanted():
            return "a dry pass of the guide is to come first"
        case PassAgreed():
            return f"go for the dry pass, given by {_by(event.by)}"
        case GuideSeen():
            ends = f"; the ends are {apart(event.apart_mm)} than in the program" if event.apart_mm else ""
            shift = f", nudged by {signed_mm(event.shift_mm)} in all" if event.shift else ""
            return f"the guide was seen right at its {event.end} end by {_by(event.by)}{shift}{ends}"
        case GuideNudged():
            return f"the guide is nudged at its {event.end} end by {_by(event.by)}: {signed_mm(event.mm)}"
        case PaceAsked():
            return f"at most {event.percent} % of the planned pace, asked for by {_by(event.by)}"
        case CheckTaken():
            how = f"read by {'the contact' if event.by == 'contact' else _by(event.by)}"
            return f"check at turn {grouped(event.turn)}: {how if event.read else 'passed over'}"
        case Unwound():
            return f"unwound from turn {turn(event.before)} to {turn(event.count)}"
        case AlarmRaised():
            return f"alarm: {event.text}"
        case NoteMade():
            return f"note: {event.text}"
        case CoilFinished():
            return f"{event.outcome}: {event.reason}"
        case _:
            return _words(event.kind)


def when(event: Event) -> str:
    """Time of a fact since its run began."""
    at_ms = getattr(event, "at_ms", 0)
    return duration(at_ms / 1000.0)


def _cause(cause: int) -> str:
    known = Cause(cause)
    return _CAUSES.get(known, _words(known.name))


def _by(who: str) -> str:
    return {"virtual": "the simulation", "operator": "you"}.get(who, who)


def _words(name: str) -> str:
    return name.lower().replace("_", " ")
