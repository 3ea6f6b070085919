"""What is measured by hand on a finished coil: the fact to keep, and what it says of the coil."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from windctl.errors import UsageError

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.profile.model import MachineProfile
    from windctl.record.addenda import CoilMeasured
    from windctl.shop.cold_reading import ColdReading
    from windctl.shop.still_reads import ColdValue, Still


# Beyond three times what wire, enamel and packing leave open from the tables alone, it is likelier a slip.
_ODD_MASS, _ODD_BUILD = 0.15, 0.35
_LOOK_AT_MASS = "is the bobbin taken off? If it was a slip, `windctl coils withdraw` keeps it from teaching"
_LOOK_AT_BUILD = (
    "is it half of what lies beyond the core, at the core's ends? If it was a slip, `windctl coils withdraw` "
    "keeps it from teaching"
)


@dataclass(frozen=True, slots=True)
class Measurement:
    """What somebody measured; None: not that. Units as in the record. `gain_rel`: of a meter with a `meter`
    name of its own."""

    ohm: float | None = None
    celsius: float | None = None
    minutes: float | None = None
    stage: str = ""
    meter: str = ""
    gain_rel: float | None = None
    grams: float | None = None
    grams_sd: float | None = None
    build_mm: float | None = None
    build_sd_mm: float | None = None
    henry: float | None = None
    quality: float | None = None
    test_hz: float | None = None
    resonance_hz: float | None = None
    load_pf: float | None = None
    load_ohm: float | None = None


@dataclass(frozen=True, slots=True)
class Judged:
    """What a reading says: itself at 20 degrees C, the verdict where the target was a resistance, and how it
    compares with those from when the coil was made, if there are any."""

    reading: ColdReading
    u95_ohm: float
    verdict: str | None
    still: Still | None

    def as_json(self) -> dict[str, Any]:
        """The same as other programs read it."""
        answer: dict[str, Any] = {"dcr_u95_ohm": self.u95_ohm}
        if self.verdict is not None:
            answer["verdict"] = self.verdict
        return {**answer, "still_reads": None if self.still is None else still_json(self.still)}


def fact_of(taken: Measurement, profile: MachineProfile, by: str, wall_time: str) -> CoilMeasured:
    """The fact to keep. Raises UsageError where the figures do not go together, or nothing was measured."""
    from windctl.record.addenda import CoilMeasured
    from windctl.shop.cold_reading import by_hand, meter_of

    _refuse(taken)
    fact = CoilMeasured(
        wall_time,
        by,
        grams=taken.grams,
        grams_sd=None if taken.grams is None else taken.grams_sd,
        build_mm=taken.build_mm,
        build_sd_mm=None if taken.build_mm is None else taken.build_sd_mm,
        stage=taken.stage,
        henry=taken.henry,
        quality=taken.quality,
        test_hz=taken.test_hz,
        resonance_hz=taken.resonance_hz,
        load_pf=taken.load_pf,
        load_ohm=taken.load_ohm,
    )
    if taken.ohm is None or taken.celsius is None:
        return fact
    meter = meter_of(profile)
    if taken.meter:
        meter = replace(meter, name=taken.meter)
    if taken.gain_rel is not None:
        meter = replace(meter, gain_rel=taken.gain_rel)
    try:
        cold = by_hand(meter, taken.ohm, taken.celsius, taken.minutes)
    except ValueError as error:
        raise UsageError(str(error)) from None
    return replace(
        fact,
        ohm=taken.ohm,
        celsius=taken.celsius,
        minutes=taken.minutes,
        dcr_20c_ohm=cold.ohm,
        dcr_rel=cold.rel_besides_instruments,
        meter=meter.name,
        thermometer=meter.place,
        gain_rel=meter.gain_rel,
        noise_rel=meter.noise_rel,
        floor_ohm=meter.floor_ohm,
        lead_ohm=meter.lead_ohm,
        lead_sd_ohm=meter.lead_sd_ohm,
        celsius_sd=meter.celsius_sd,
        over_air_k=meter.over_air_k,
        over_air_sd_k=meter.over_air_sd_k,
    )


def judged(book: Book, coil: str, fact: CoilMeasured, change_pct: float | None = None) -> Judged | None:
    """What a reading that is not kept yet says of a coil; None where it is no resistance. `change_pct`: the
    least change that matters."""
    from windctl.forecast.verdict import verdict
    from windctl.record.events import CoilStarted
    from windctl.shop.cold_reading import meter_of
    from windctl.shop.life import life, profile_of, reading_of
    from windctl.shop.still_reads import WORTH_TELLING_PCT

    events = tuple(book.events(coil))
    started = events[0]
    assert isinstance(started, CoilStarted)  # a record begins with it
    reading = reading_of(fact, meter_of(profile_of(started)))
    if reading is None:
        return None
    lived = life(events, (*book.addenda(coil), fact), change_pct or WORTH_TELLING_PCT)
    half, target = reading.u95_ohm, started.target
    said = None
    if target.kind != "turns" and reading.bare:
        said = verdict(reading.ohm - half, reading.ohm + half, target.value, target.tolerance_pct)
    return Judged(reading, half, said, lived.stills[-1])


def beside_plan(book: Book, coil: str, fact: CoilMeasured) -> tuple[str, ...]:
    """Mass and build that were measured, beside what the recipe's plan has at that many turns: a slip shows.

    Empty where neither was measured, and for a coil whose record has no plan to compare with.
    """
    from math import pi

    from windctl.desk.numbers import grouped
    from windctl.material.wire import mass_g_per_m
    from windctl.record.events import CoilStarted

    started, turns = next(iter(book.events(coil))), book.find(coil).turns
    basis = started.basis if isinstance(started, CoilStarted) else None
    if basis is None or not turns:
        return ()
    build = basis.build_per_turn_mm * turns
    metres = turns * (basis.perimeter_mm + pi * basis.crown * build) / 1000.0
    lines = []
    if fact.grams is not None:
        planned = metres * mass_g_per_m(*basis.wire_sizes())
        slip = "" if abs(fact.grams / planned - 1.0) < _ODD_MASS else f": {_LOOK_AT_MASS}"
        lines.append(f"wire {grouped(fact.grams, 1)} g, where the plan has {grouped(planned, 1)} g{slip}")
    if fact.build_mm is not None:
        slip = "" if abs(fact.build_mm / build - 1.0) < _ODD_BUILD else f": {_LOOK_AT_BUILD}"
        lines.append(f"build {grouped(fact.build_mm, 1)} mm, where the plan has {grouped(build, 1)} mm{slip}")
    return tuple(lines)


def _refuse(taken: Measurement) -> None:
    what = (taken.ohm, taken.grams, taken.build_mm, taken.henry, taken.quality, taken.resonance_hz)
    if all(one is None for one in what):
        raise UsageError(
            "nothing was measured: give --ohm with --celsius, --mass, --build, --inductance, --quality "
            "or --resonance"
        )
    if (taken.ohm is None) != (taken.celsius is None):
        raise UsageError("--ohm and --celsius go together: a resistance alone says little")
    if taken.ohm is None and (taken.minutes is not None or taken.meter or taken.gain_rel is not None):
        raise UsageError("--minutes, --meter and --gain-sd belong to --ohm")
    if taken.test_hz is not None and taken.henry is None and taken.quality is None:
        raise UsageError("--at-hz belongs to --inductance and --quality")
    if taken.resonance_hz is None and (taken.load_pf is not None or taken.load_ohm is not None):
        raise UsageError("--load-pf and --load-ohm belong to --resonance: what lay across the coil then")


def still_json(said: Still) -> dict[str, Any]:
    """A statement as other programs read it."""
    return {
        "statement": said.statement,
        "against": said.before.label,
        "difference_ohm": said.difference_ohm,
        "difference_pct": said.difference_pct,
        "u95_ohm": said.u95_ohm,
        "matters_ohm": said.matters_ohm,
        "shared": [
            {
                "source": one.name,
                "before_ohm": one.before_ohm,
                "after_ohm": one.after_ohm,
                "in_difference_ohm": one.left_ohm,
            }
            for one in said.shared
        ],
    }


def cold_json(value: ColdValue) -> dict[str, Any]:
    """A cold value with its budget as other programs read it."""
    return {
        "dcr_20c_ohm": value.ohm,
        "dcr_sd_ohm": value.sd,
        "dcr_u95_ohm": value.u95,
        "scatter": {
            "square": value.residual_square,
            "freedom": value.freedom,
            "chance": value.chance,
        },
        "readings": [
            {"label": reading.label, "weight": weight}
            for reading, weight in zip(value.readings, value.weights, strict=True)
        ],
        "budget": [
            {
                "source": line.name,
                "sd": line.sd,
                "unit": line.unit,
                "ohm_per_unit": line.slope_ohm,
                "ohm": line.ohm,
            }
            for line in value.budget
        ],
    }
