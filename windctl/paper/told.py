"""A coil's rare facts in the words of somebody who tells it later. Pure."""

from __future__ import annotations

import dataclasses
from collections.abc import Iterable
from dataclasses import dataclass

from windctl.numbers import apart, at_turn, duration, grouped, ohm, signed_mm, with_uncertainty
from windctl.protocol.messages import Cause, Refusal, Trip
from windctl.protocol.rules import NO_BOARD_QUEUE
from windctl.record import events as facts
from windctl.record.addenda import (
    Addendum,
    CoilMeasured,
    CoilNoted,
    CoilReadmitted,
    CoilTaught,
    CoilWithdrawn,
    MagnetTold,
    PairMade,
    PairParted,
)
from windctl.record.events import Event
from windctl.record.zeroing import why_refused

_Z95 = 1.959964
_BY = {"virtual": "the simulation", "operator": "the operator", "windctl": "the program"}
_CAUSES = {
    Cause.STOP_POINT: "at its stop point",
    Cause.QUEUE_END: "at the end of its program",
    Cause.HOLD: "as it was told to",
    Cause.PEDAL: "the pedal was let go",
    Cause.SILENCE: "the board no longer heard the computer",
    Cause.MAX_COUNT: "at the most turns of the recipe",
    Cause.TRIP: "tripped",
    Cause.GREET: "the computer came back to it",
    Cause.DISARM: "its drives were switched off",
}
_ALIKE = 3  # choices of a stop point in a row, from which on only the first and the last are told


@dataclass(frozen=True, slots=True)
class Line:
    """One fact: when, since its run began; what."""

    when: str
    what: str


def story(rare: Iterable[Event], counts_per_turn: int) -> tuple[Line, ...]:
    """The facts in order. Of a long row of refined stop points only the first and the last are told."""
    lines: list[Line] = []
    choices: list[Line] = []
    for event in rare:
        text = told(event, counts_per_turn)
        if text is None:
            continue
        at_ms = getattr(event, "at_ms", None)
        line = Line("" if at_ms is None else duration(at_ms / 1000.0), text)
        if isinstance(event, facts.StopPointChosen):
            choices.append(line)
            continue
        lines += _gathered(choices)
        choices = []
        lines.append(line)
    return (*lines, *_gathered(choices))


def _gathered(choices: list[Line]) -> list[Line]:
    if len(choices) < _ALIKE:
        return choices
    between = Line("", f"refined {len(choices) - 2} times between")
    return [choices[0], between, choices[-1]]


def told(event: Event, counts_per_turn: int) -> str | None:
    """One line for one rare fact; None for what goes without saying."""

    def turn(count: int) -> str:
        return grouped(count / max(counts_per_turn, 1))

    match event:
        case facts.CoilStarted():
            return f"Begun by {event.operator} on {event.machine}, {_moment(event.wall_time)}."
        case facts.Resumed():
            return f"Taken up again by {event.operator}, {_moment(event.wall_time)}."
        case facts.BoardGreeted() if event.identity.queue == NO_BOARD_QUEUE:
            return None
        case facts.BoardGreeted():
            return f"The machine answered, standing at turn {turn(event.identity.count)}."
        case facts.GoGiven():
            return None if event.by == "consent" else f"Go, given by {by(event.by)}."
        case facts.WentOn():
            return f"The spindle turned from turn {turn(event.count)} on."
        case facts.Held():
            return f"It came to rest at turn {turn(event.count)}, {_cause(event.cause)}."
        case facts.HoldRequested():
            return f"Held by {by(event.by)}: {event.reason}."
        case facts.EndRequested():
            return f"To be ended there, said {by(event.by)}: {event.reason}."
        case facts.ClearGiven():
            return f"The trip was cleared by {by(event.by)}."
        case facts.StopPointChosen():
            finish = ohm(event.finish_ohm, _Z95 * event.finish_sd)
            return f"To stop at turn {turn(event.count)} ({event.reason}); foreseen {finish} at 20 °C."
        case facts.Tripped():
            return f"The machine tripped at turn {turn(event.count)}: {_named(Trip, event.trip)}."
        case facts.LinkLost():
            return f"The line to the machine was lost: {event.reason}."
        case facts.CountCorrected():
            return f"The turn was set to {at_turn(event.turn)} by {by(event.by)}: {event.reason}."
        case facts.CounterRead():
            if event.doubted:
                return f"A counter at {grouped(event.turn)} was typed by {by(event.by)}, and asked about."
            again = "; what was read before was read at a wrong count" if event.recounted else ""
            return f"The counter stood at {grouped(event.turn)}, read by {by(event.by)}{again}."
        case facts.CommandRefused():
            return f"The machine declined a command: {_named(Refusal, event.refused.why)}."
        case facts.HandsAsked():
            return f"Drives off: {event.reason}."
        case facts.WireBroke():
            return f"The wire broke at turn {at_turn(event.turn)}."
        case facts.Spliced():
            return f"The wire was spliced at turn {at_turn(event.turn)} by {by(event.by)}."
        case facts.WireChanged():
            name = f", {event.spool}," if event.spool else ""
            return f"Another spool{name} was joined on at turn {at_turn(event.turn)}."
        case facts.CheckAsked():
            before, after = _Z95 * event.without_ohm, _Z95 * event.with_ohm
            gain = f"which takes the finish from ±{before:.0f} to ±{after:.0f} ohm"
            return f"Stopped at turn {grouped(event.turn)} to be read, {gain}."
        case facts.ReadingTyped():
            read = f"{ohm(event.ohm)} at {event.celsius:.1f} °C"
            return f"Read by hand at turn {grouped(event.turn)}: {read}, as the meter showed it."
        case facts.ReadingTakenBack():
            return f"What was typed last was taken back by {by(event.by)}."
        case facts.PaceAsked():
            return f"No faster than {event.percent} % of the planned pace, asked for by {by(event.by)}."
        case facts.ZeroWanted():
            return f"The contact was to be zeroed before the first turn, said {by(event.by)}."
        case facts.LeadsTogether():
            return f"The contact's leads were put together, said {by(event.by)}."
        case facts.ContactZeroed():
            found = f"{ohm(event.ohm, _Z95 * event.sd_ohm)} in {event.readings} readings"
            return f"Zeroed: leads and contact had {found}, taken off from then on."
        case facts.ZeroRefused():
            return f"Not zeroed: {why_refused(event)}."
        case facts.ZeroEnded():
            return f"The contact was not zeroed: {event.reason}."
        case facts.PassWanted():
            return f"The guide was to be seen at both flanges before the first turn, said {by(event.by)}."
        case facts.PassAgreed():
            return f"Go for the guide alone, there and back, given by {by(event.by)}."
        case facts.GuideSeen():
            where = f"The guide was seen to stand right at its {event.end} end, by {by(event.by)}"
            if event.shift:
                where += f", nudged by {signed_mm(event.shift_mm)} in all from where it had been put"
            if event.apart_mm:
                where += f"; the ends were {apart(event.apart_mm)} than in the program"
            return f"{where}."
        case facts.GuideNudged():
            flange = "far" if event.steps > 0 else "start"
            return (
                f"The guide was nudged at its {event.end} end, by {by(event.by)}: {abs(event.mm):.2f} mm "
                f"towards the {flange} flange."
            )
        case facts.CheckTaken():
            how = "the coil was read" if event.read else "passed over"
            return f"Check at turn {grouped(event.turn)}: {how}."
        case facts.Unwound():
            return f"Unwound by hand from turn {turn(event.before)} to {turn(event.count)}."
        case facts.AlarmRaised():
            return f"Alarm at turn {grouped(event.turn)}: {event.text}."
        case facts.NoteMade():
            return f"Note by {by(event.by)}: {event.text}"
        case facts.CoilFinished():
            return f"{event.outcome.capitalize()}: {event.reason}."
        case _:
            return f"{plainly(event.kind)}{_fields(event)}."


def said_since(fact: Addendum) -> tuple[str, str, str] | None:
    """(when, who, what) of a fact after the record was closed; None for what only the program needs."""
    match fact:
        case CoilTaught():
            return None
        case CoilNoted():
            what = f"Note: {fact.text}"
        case CoilWithdrawn():
            what = f"Withdrawn, teaches nothing: {fact.reason}"
        case CoilReadmitted():
            what = f"Readmitted, teaches again: {fact.reason}"
        case CoilMeasured():
            what = _measured(fact)
        case MagnetTold():
            what = f"The {fact.pole} pole of its magnet faces the strings"
        case PairMade():
            left = f"{fact.left_db:.0f} dB ({fact.left_low_db:.0f} to {fact.left_high_db:.0f})"
            what = f"Paired with {fact.partner_number}: {fact.joined}; hum left in a uniform field {left}"
        case PairParted():
            what = f"Parted from {fact.partner_number}: {fact.reason}"
        case _:
            what = f"{plainly(fact.kind.removeprefix('coil_'))}{_fields(fact)}"
    return _moment(getattr(fact, "wall_time", "")), str(getattr(fact, "by", "")), what


def _measured(fact: CoilMeasured) -> str:
    parts = []
    if fact.ohm is not None and fact.celsius is not None:
        parts.append(f"{ohm(fact.ohm)} at {fact.celsius:.1f} °C, as the meter showed it{_taken(fact)}")
    if fact.dcr_20c_ohm is not None:
        parts.append(f"{ohm(fact.dcr_20c_ohm)} at 20 °C without leads")
    if fact.grams is not None:
        parts.append(f"wire {with_uncertainty(fact.grams, _Z95 * (fact.grams_sd or 0.0), 'g')}")
    if fact.build_mm is not None:
        parts.append(f"build {with_uncertainty(fact.build_mm, _Z95 * (fact.build_sd_mm or 0.0), 'mm')}")
    at = "" if fact.test_hz is None else f" at {grouped(fact.test_hz)} Hz"
    if fact.henry is not None:
        parts.append(f"inductance {fact.henry:g} H{at}")
    if fact.quality is not None:
        parts.append(f"Q {fact.quality:g}{at}")
    if fact.resonance_hz is not None:
        parts.append(f"resonance at {grouped(fact.resonance_hz)} Hz{_loaded(fact)}")
    stage = f", {fact.stage}" if fact.stage else ""
    return f"Measured{stage}: {'; '.join(parts)}" if parts else f"Measured{stage}"


def _taken(fact: CoilMeasured) -> str:
    """Which meter, and how long after winding, where that was said."""
    meter = f", {fact.meter}" if fact.meter else ""
    return meter if fact.minutes is None else f"{meter}, {fact.minutes:g} min after winding"


def _loaded(fact: CoilMeasured) -> str:
    loads = [] if fact.load_pf is None else [f"{fact.load_pf:g} pF"]
    if fact.load_ohm is not None:
        loads.append(f"{fact.load_ohm / 1000:g} kohm" if fact.load_ohm >= 1000 else f"{fact.load_ohm:g} ohm")
    return f" with {' and '.join(loads)} across it" if loads else ""


def by(who: str) -> str:
    """Who did something, as a report names them."""
    return _BY.get(who, who)


def plainly(name: str) -> str:
    """A name of the program in plain words: `tension_low` to `Tension low`."""
    return name.lower().replace("_", " ").capitalize()


def _moment(text: str) -> str:
    """A time as recorded, to the minute: `2026-12-01 14:52`."""
    return text[:16].replace("T", " ")


def _cause(cause: int) -> str:
    try:
        known = Cause(cause)
    except ValueError:  # of a later board
        return f"for cause {cause}"
    return _CAUSES.get(known, known.name.lower().replace("_", " "))


def _named(names: type[Trip] | type[Refusal], value: int) -> str:
    try:
        return names(value).name.lower().replace("_", " ")
    except ValueError:  # of a later board
        return f"number {value}"


def _fields(fact: Event | Addendum) -> str:
    """A fact's fields, where there are no words for it here."""
    shown = [
        f"{field.name.replace('_', ' ')} {value:g}"
        if isinstance(value, float)
        else f"{field.name.replace('_', ' ')} {value}"
        for field in dataclasses.fields(fact)
        if field.name not in ("at_ms", "wall_time", "by")
        and (value := getattr(fact, field.name)) not in (None, "")
        and isinstance(value, str | int | float)
    ]
    return f": {', '.join(shown)}" if shown else ""
