"""What is typed about a spool, and what it means. Pure: nothing is kept here."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import TYPE_CHECKING

from windctl.desk.figures import parse_ohm
from windctl.desk.spool_keeping import NewSpool, check_new
from windctl.errors import UsageError
from windctl.tui.field import Field

if TYPE_CHECKING:
    from windctl.material.enamel import Grade

NEW = (
    Field("name", "name on the spool", "empty: the next number"),
    Field("wire", "bare wire", "AWG 42, or a metric size in mm such as 0.063"),
    Field("enamel", "enamel", "grade 1, grade 2, or better: mm overall"),
    Field("insulation", "its kind", "such as polyurethane; may be left empty"),
    Field("grams", "wire on it, g", "scale less empty spool; may be left empty"),
    Field("ohm_per_m", "ohm per metre", "measured on it, at 20 °C; may be left empty"),
    Field("notes", "notes", "maker, lot, shelf"),
)
WEIGH = (Field("grams", "wire on it, g", "the scale's reading less the empty spool"),)
PIECE = (
    Field("metres", "length, m", "of the piece from the loose end"),
    Field("ohm", "resistance, ohm", "leads taken off; 10.9 or 1.09k"),
    Field("celsius", "temperature, °C", "of the piece, as it was measured"),
)

_GRADES: dict[str, Grade] = {"1": "grade 1", "grade 1": "grade 1", "2": "grade 2", "grade 2": "grade 2"}


def number_of(text: str, what: str, low: float, high: float, unit: str) -> float:
    """A figure with either decimal sign within limits. Raises UsageError."""
    try:
        value = float(text.replace(",", "."))
    except ValueError:
        raise UsageError(f"{what}: {text!r} is not a number of {unit}") from None
    if not (math.isfinite(value) and low <= value <= high):
        raise UsageError(f"{what}: {text} {unit} is not within {low:g} to {high:g} {unit}")
    return value


def new_spool(typed: Mapping[str, str]) -> NewSpool:
    """The spool that is meant. Raises UsageError where there is none like it."""
    wire, enamel = typed["wire"], typed["enamel"].lower()
    if not wire:
        raise UsageError("which wire is it? AWG 42, or its bare diameter in mm")
    if not enamel:
        raise UsageError("how thick is its enamel? Its grade or, better, mm overall by micrometer")
    metric = wire[0].isdigit() or wire[0] in ".,"
    new = NewSpool(
        name=typed["name"] or None,
        gauge=None if metric else wire.upper(),
        diameter_mm=number_of(wire, "bare wire", 0.01, 1.0, "mm") if metric else None,
        enamel=_GRADES.get(enamel),
        overall_mm=None if enamel in _GRADES else number_of(enamel, "enamel", 0.01, 1.2, "mm"),
        insulation=typed["insulation"],
        grams=number_of(typed["grams"], "wire on it", 0.0, 100_000.0, "g") if typed["grams"] else None,
        ohm_per_m=_ohm(typed["ohm_per_m"], "ohm per metre") if typed["ohm_per_m"] else None,
        notes=typed["notes"],
    )
    check_new(new)
    return new


def weighed(typed: Mapping[str, str]) -> float:
    """Grams. Raises UsageError."""
    return number_of(typed["grams"], "wire on it", 0.0, 100_000.0, "g")


def piece(typed: Mapping[str, str]) -> tuple[float, float, float]:
    """(metres, ohm, degrees C). Raises UsageError."""
    metres = number_of(typed["metres"], "length", 0.01, 10_000.0, "m")
    ohm = _ohm(typed["ohm"], "resistance")
    return metres, ohm, number_of(typed["celsius"], "temperature", -40.0, 60.0, "°C")


def _ohm(text: str, what: str) -> float:
    try:
        return parse_ohm(text)
    except ValueError as error:
        raise UsageError(f"{what}: {error}") from None
