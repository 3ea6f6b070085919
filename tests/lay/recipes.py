"""Recipes and machines for tests, as texts, with any key changed."""

from __future__ import annotations

from windctl.profile.load import parse_profile
from windctl.profile.model import MachineProfile
from windctl.recipe.load import parse_recipe
from windctl.recipe.model import Recipe

EVEN = {
    "name": '"even, for a test"',
    "bobbin.core_length_mm": "56.0",
    "bobbin.core_width_mm": "6.0",
    "bobbin.corner_radius_mm": "3.0",
    "bobbin.flange_gap_mm": "11.0",
    "bobbin.flange_depth_mm": "7.0",
    "coil.direction_from_face": '"cw"',
    "coil.mounted": '"face out"',
    "coil.start_flange": '"base"',
    "wire.gauge": '"AWG 42"',
    "wire.overall_mm": "0.072",
    "wire.ohm_per_m_20c": "5.4716",
    "lay.style": '"even"',
    "lay.pitch_mm": "0.08",
    "lay.margin_mm": "0.1",
    "spindle.start_rpm": "200",
    "spindle.start_turns": "50",
    "spindle.cruise_rpm": "800",
    "spindle.finish_rpm": "150",
    "spindle.finish_turns": "30",
    "spindle.ramp_rpm_per_s": "200",
    "stop.turns": "8000",
    "stop.tolerance_pct": "1.0",
}

WANDER = EVEN | {
    "name": '"wander, for a test"',
    "lay.style": '"scatter"',
    "lay.pitch_mm": None,
    "lay.turns_per_pass": "42",
    "lay.pattern": '"wander"',
    "lay.amount": "0.5",
    "lay.seed": "20",
}

STEP = {
    "spindle.drive": '"step"',
    "spindle.counts_per_turn": "400",
    "spindle.index": "true",
    "guide.kind": '"step"',
}


def _toml(keys: dict[str, str | None]) -> str:
    tables: dict[str, list[str]] = {"": ["format = 1"]}
    for key, value in keys.items():
        table, _, name = key.rpartition(".")
        if value is not None:
            tables.setdefault(table, []).append(f"{name} = {value}")
    return "\n".join(
        line for table, lines in tables.items() for line in ([f"[{table}]"] if table else []) + lines
    )


def recipe(base: dict[str, str | None] | None = None, /, **changes: str | None) -> Recipe:
    """The even recipe, or `base`, with keys changed; a key is written with __ for the dot, None drops it."""
    changed = {key.replace("__", "."): value for key, value in changes.items()}
    return parse_recipe(_toml({**(EVEN if base is None else base), **changed}))


def machine(**changes: str | None) -> MachineProfile:
    """A machine with step drives and an encoder of 400 counts, with keys changed."""
    changed = {key.replace("__", "."): value for key, value in changes.items()}
    return parse_profile(_toml({**STEP, **changed}))
