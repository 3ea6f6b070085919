"""Several coils beside the first: their curves over turns as differences from its own, and what was set
otherwise."""

from __future__ import annotations

import json
from bisect import bisect_right
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TypeAlias

Setting: TypeAlias = str | float | bool | None

POINTS = 121  # common turns at which curves are compared
_NO_SETTING = ("machine.port.", "machine.format", "recipe.format")  # where the board is plugged in


@dataclass(frozen=True, slots=True)
class Compared:
    """A coil. `curve`: (turn, ohm at 20 degrees C) as far as it was read while it grew, turns rising.
    `settings`: by dotted name, absent where nobody said."""

    number: str
    recipe: str
    started: str
    turns: float | None
    ohm: float | None
    u95_ohm: float | None
    program_digest: str
    curve: tuple[tuple[float, float], ...]
    settings: Mapping[str, Setting]
    still_open: bool = False  # its curve is kept when it ends


@dataclass(frozen=True, slots=True)
class Curves:
    """At each of `turns`, how much more each coil has than the first, ohm at 20 degrees C; None outside what
    both were read over. `differences`: one row per coil, the first's all zero."""

    turns: tuple[float, ...]
    differences: tuple[tuple[float | None, ...], ...]

    def last(self, coil: int) -> tuple[float, float] | None:
        """The last turn at which a coil can be compared, and its difference there."""
        there = [
            (turn, off)
            for turn, off in zip(self.turns, self.differences[coil], strict=True)
            if off is not None
        ]
        return there[-1] if there else None


@dataclass(frozen=True, slots=True)
class Differing:
    """One setting and what each coil had."""

    name: str
    values: tuple[Setting, ...]


def curves(coils: Sequence[Compared], points: int = POINTS) -> Curves:
    """Differences at evenly spaced turns, straight between the points of each curve; empty where no two
    curves meet. A curve of 500 points bends by less than a millionth between two of them."""
    first = coils[0].curve
    spans = [
        (max(first[0][0], coil.curve[0][0]), min(first[-1][0], coil.curve[-1][0]))
        for coil in coils[1:]
        if len(first) > 1 and len(coil.curve) > 1
    ]
    spans = [(low, high) for low, high in spans if low < high]
    if not spans:
        return Curves((), tuple(() for _ in coils))
    low, high = min(low for low, _ in spans), max(high for _, high in spans)
    turns = tuple(low + (high - low) * n / (points - 1) for n in range(points))
    base = [at(first, turn) for turn in turns]
    rows: list[tuple[float | None, ...]] = []
    for coil in coils:
        own = [at(coil.curve, turn) for turn in turns]
        rows.append(tuple(None if a is None or b is None else b - a for a, b in zip(base, own, strict=True)))
    return Curves(turns, tuple(rows))


def at(curve: Sequence[tuple[float, float]], turn: float) -> float | None:
    """A curve's value at a turn, straight between its points; None outside it."""
    if len(curve) < 2 or not curve[0][0] <= turn <= curve[-1][0]:
        return None
    after = min(max(bisect_right(curve, turn, key=lambda point: point[0]), 1), len(curve) - 1)
    (x0, y0), (x1, y1) = curve[after - 1], curve[after]
    return y1 if x1 == x0 else y0 + (y1 - y0) * (turn - x0) / (x1 - x0)


def settings_of(recipe_json: str, profile_json: str, **more: Setting) -> dict[str, Setting]:
    """What a coil was wound with, by dotted name: "recipe.lay.pitch_mm", "machine.spindle.max_rpm", and
    `more` under their own names."""
    flat: dict[str, Setting] = {}
    for room, text in (("recipe", recipe_json), ("machine", profile_json)):
        _flatten(room, json.loads(text), flat)
    kept = {name: value for name, value in flat.items() if not name.startswith(_NO_SETTING)}
    return {**{name: value for name, value in more.items() if value not in (None, "")}, **kept}


def _flatten(name: str, value: object, into: dict[str, Setting]) -> None:
    if isinstance(value, dict):
        for key, inner in value.items():
            _flatten(f"{name}.{key}", inner, into)
    elif isinstance(value, bool | int | float | str):
        into[name] = value


def differing(coils: Sequence[Compared]) -> tuple[Differing, ...]:
    """The settings in which not all coils agree, in the order in which they are first met."""
    names = dict.fromkeys(name for coil in coils for name in coil.settings)
    found = []
    for name in names:
        values = tuple(coil.settings.get(name) for coil in coils)
        if any(value != values[0] for value in values[1:]):
            found.append(Differing(name, values))
    return tuple(found)
