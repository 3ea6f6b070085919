"""Recipe and machine as a record holds them, read key by key.

The texts are taken as they stand, not through this version's idea of a recipe: a record of years ago, or
one with keys that came later, is shown in full all the same.
"""

from __future__ import annotations

import json
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from windctl.numbers import grouped
from windctl.record.events import CoilStarted

# What a key ends with, and how its value is written; the first that fits counts.
_UNITS = (
    ("_mm_per_s", "mm/s"),
    ("_rpm_per_s", "rpm/s"),
    ("_steps_per_mm", "steps/mm"),
    ("_ohm_per_m_20c", "ohm/m at 20 °C"),
    ("_dcr_20c_ohm", "ohm at 20 °C"),
    ("_mm", "mm"),
    ("_cn", "cN"),
    ("_rpm", "rpm"),
    ("_pct", "%"),
    ("_ohm", "ohm"),
    ("_celsius_sd", "K"),
    ("_k", "K"),
)
_NAMES = {
    "accel_rpm_per_s": "acceleration",
    "band_cn": "band of a turn's mean, ±",
    "celsius_sd": "thermometer, sd",
    "coil_over_air_k": "coil over air",
    "coil_over_air_sd_k": "coil over air, sd",
    "contact_length_mm": "wire to the contact",
    "cruise_rpm": "cruising speed",
    "dcr_20c_ohm": "resistance",
    "decel_rpm_per_s": "braking",
    "direction_from_face": "way of the wire, from the strings",
    "distance_mm": "guide to bobbin",
    "finish_rpm": "speed of the last turns",
    "finish_turns": "last turns",
    "floor_ohm": "resolution and contact",
    "gain_sd_pct": "meter's gain, sd",
    "lead_ohm": "leads",
    "lead_sd_ohm": "leads, sd",
    "magnet_up": "pole towards the strings",
    "max_mm_per_s": "highest speed",
    "max_rpm": "highest speed",
    "noise_pct": "meter's noise",
    "ohm_per_m_20c": "wire",
    "ohm_per_m_sd": "wire, sd, ohm/m",
    "overall_mm": "diameter with enamel",
    "ramp_rpm_per_s": "acceleration",
    "set_cn": "tension",
    "start_rpm": "speed of the first turns",
    "start_stop_mm_per_s": "speed without ramp",
    "start_turns": "first turns",
    "steps_per_mm": "resolution",
    "unit_cn": "unit of the sensor",
}
_WAYS = {"cw": "clockwise", "ccw": "counter-clockwise"}


@dataclass(frozen=True, slots=True)
class Bobbin:
    """What of a recipe the drawings need; mm. `margin`: from a flange to the guide's turn-round."""

    core_length: float
    core_width: float
    corner_radius: float
    core_perimeter: float | None
    gap: float
    depth: float
    margin: float
    loose: bool  # a scatter, which slides; else an even lay, which holds
    clockwise: bool  # the wire's way from start to finish, seen from the strings
    starts_at_face: bool
    pole: str  # towards the strings: "north", "south" or ""


def recipe_of(started: CoilStarted) -> Mapping[str, Any]:
    """The recipe's tables. Empty where the text is none that can be read."""
    try:
        return tomllib.loads(started.recipe_text)
    except tomllib.TOMLDecodeError:
        return {}


def profile_of(started: CoilStarted) -> Mapping[str, Any]:
    """The machine's profile. Empty where the text is none that can be read."""
    try:
        read = json.loads(started.profile_json)
    except ValueError:
        return {}
    return read if isinstance(read, dict) else {}


def bobbin_of(recipe: Mapping[str, Any]) -> Bobbin | None:
    """The bobbin and how it is wound; None where the recipe does not say it in the words known here."""
    try:
        bobbin, coil, lay = recipe["bobbin"], recipe["coil"], recipe["lay"]
        perimeter = bobbin.get("core_perimeter_mm")
        return Bobbin(
            core_length=float(bobbin["core_length_mm"]),
            core_width=float(bobbin["core_width_mm"]),
            corner_radius=float(bobbin["corner_radius_mm"]),
            core_perimeter=None if perimeter is None else float(perimeter),
            gap=float(bobbin["flange_gap_mm"]),
            depth=float(bobbin["flange_depth_mm"]),
            margin=float(lay["margin_mm"]),
            loose=lay["style"] != "even",
            clockwise=coil["direction_from_face"] == "cw",
            starts_at_face=coil["start_flange"] == "face",
            pole=str(coil.get("magnet_up", "")),
        )
    except (KeyError, TypeError, ValueError, AttributeError):
        return None


def settings(tables: Mapping[str, Any]) -> list[tuple[str, list[tuple[str, str]]]]:
    """Every setting by table, as (name, value) in words; what is not set is left out."""
    found = []
    for table, values in tables.items():
        if isinstance(values, dict):
            rows = [(_name(key), _value(key, value)) for key, value in values.items() if value is not None]
            if rows:
                found.append((table, rows))
    return found


def _name(key: str) -> str:
    if key in _NAMES:
        return _NAMES[key]
    for ending, _ in _UNITS:
        if key.endswith(ending):
            key = key.removesuffix(ending)
            break
    return key.replace("_", " ")


def _value(key: str, value: object) -> str:
    unit = next((unit for ending, unit in _UNITS if f"_{key}".endswith(ending)), "")
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, int | float):
        digits = grouped(value) if key.endswith("turns") and float(value).is_integer() else f"{value:.12g}"
        return f"{digits} {unit}".strip()
    return _WAYS.get(str(value), str(value))
