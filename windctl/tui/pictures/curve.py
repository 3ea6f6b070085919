"""Resistance over turns: what was, the fan of what may come, and what is wanted. The axes never move.

The second drawing looks closer: the finish as it was forecast at every turn so far, in per cent of the
target, closing in on the band that counts as good.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise

from windctl.tui.pictures.axes import round_steps
from windctl.tui.pictures.braille import ACROSS, DOWN, Dots
from windctl.tui.pictures.cells import Picture, blank, put

_MARGIN = 6  # cells left of the field, for figures


@dataclass(frozen=True, slots=True)
class Point:
    """After `turn` turns: resistance so far, and the finish forecast then with its half-width; ohm, 20 °C."""

    turn: float
    ohm: float | None
    finish: float | None = None
    u95: float | None = None


@dataclass(frozen=True, slots=True)
class Band:
    """What may be at `turn`, ohm at 20 °C."""

    turn: float
    low: float
    high: float


@dataclass(frozen=True, slots=True)
class Scale:
    """Fixed for a coil. `target_ohm` is None where turns are the target; `tolerance` is a part of it."""

    turns: float
    ohm: float
    finish_ohm: float  # the middle of the closer look
    finish_span: float  # and how far it reaches to either side, a part of finish_ohm
    target_ohm: float | None = None
    target_turns: float | None = None
    tolerance: float = 0.0


def curve_picture(
    width: int, height: int, scale: Scale, past: Sequence[Point], fan: Sequence[Band]
) -> Picture:
    """The whole coil, in kohm over turns."""
    field = _Field(width, height, (0.0, scale.turns), (0.0, scale.ohm))
    dots = field.dots
    for before, after in pairwise(fan):
        field.fill(before, after, "fan")
    if scale.target_ohm is not None:
        y = field.y(scale.target_ohm)
        for x in range(0, dots.across, 3):
            dots.dot(x, y, "target")
    if scale.target_turns is not None:
        x = field.x(scale.target_turns)
        for y in range(0, dots.down, 2):
            dots.dot(x, y, "target")
    known = [(x, field.y(point.ohm)) for x, point in field.thinned(past) if point.ohm is not None]
    for (x0, y0), (x1, y1) in pairwise(known):
        dots.line(x0, y0, x1, y1, "past")
        dots.line(x0, y0 + 1, x1, y1 + 1, "past")
    if fan:
        last = fan[-1]
        dots.line(field.x(last.turn), field.y(last.low), field.x(last.turn), field.y(last.high), "finish")
    return field.picture(("past", "finish", "target", "fan"), _kohm, "kΩ")


def finish_picture(width: int, height: int, scale: Scale, past: Sequence[Point], end: float) -> Picture:
    """The forecast finish at every turn so far, closing in; in per cent of the target or the plan."""
    span = scale.finish_span * 100.0
    field = _Field(width, height, (0.0, scale.turns), (-span, span))
    dots = field.dots
    if scale.target_ohm is not None and scale.tolerance:
        for edge in (-scale.tolerance, scale.tolerance):
            y = field.y(edge * 100.0)
            for x in range(0, dots.across, 3):
                dots.dot(x, y, "target")
    y = field.y(0.0)
    for x in range(0, dots.across, 6):
        dots.dot(x, y, "target")
    bands = []
    for _, point in field.thinned(past):
        if point.finish is not None and point.u95 is not None:
            middle = 100.0 * (point.finish / scale.finish_ohm - 1.0)
            half = 100.0 * point.u95 / scale.finish_ohm
            bands.append((Band(point.turn, middle - half, middle + half), middle))
    for (before, was), (after, now) in pairwise(bands):
        field.fill(before, after, "fan")
        dots.line(field.x(before.turn), field.y(was), field.x(after.turn), field.y(now), "past")
    x = field.x(end)
    for y in range(0, dots.down, 2):
        dots.dot(x, y, "axis")
    return field.picture(("past", "target", "axis", "fan"), _per_cent)


class _Field:
    """A field of dots with a scale in both directions, and its axes around it."""

    def __init__(self, width: int, height: int, across: tuple[float, float], up: tuple[float, float]) -> None:
        self._width, self._height = width, height
        self._across, self._up = across, up
        self.dots = Dots(max(width - _MARGIN, 1), max(height - 1, 1))

    def x(self, value: float) -> int:
        low, high = self._across
        return round((value - low) / (high - low) * (self.dots.across - 1))

    def y(self, value: float) -> int:
        low, high = self._up
        return round((value - low) / (high - low) * (self.dots.down - 1))

    def thinned(self, past: Sequence[Point]) -> list[tuple[int, Point]]:
        """Of the points that fall on the same column of dots only the last, each with its column."""
        return list({self.x(point.turn): point for point in past}.items())

    def fill(self, before: Band, after: Band, layer: str) -> None:
        """Every other dot between two bands, and their edges in full."""
        left, right = self.x(before.turn), max(self.x(after.turn), self.x(before.turn) + 1)
        for x in range(left, right + 1):
            share = (x - left) / (right - left)
            low = self.y(before.low + share * (after.low - before.low))
            high = self.y(before.high + share * (after.high - before.high))
            bottom, top = max(low, 0), min(high, self.dots.down - 1)
            for y in range(bottom + (x + bottom) % 2, top + 1, 2):
                self.dots.dot(x, y, layer)
            self.dots.dot(x, low, layer)
            self.dots.dot(x, high, layer)

    def picture(self, order: Sequence[str], written: Callable[[float], str], unit: str = "") -> Picture:
        whole = blank(self._width, self._height)
        for row, cells in enumerate(self.dots.picture(order)):
            whole[row][_MARGIN:] = cells
        rows = self._height - 1
        for row in range(rows):
            put(whole, row, _MARGIN - 1, "│", "axis")
        for value in round_steps(*self._up, max(2, rows // 2)):
            row = rows - 1 - self.y(value) // DOWN
            put(whole, row, 0, written(value).rjust(_MARGIN - 1), "label")
            put(whole, row, _MARGIN - 1, "┤", "axis")
        if unit:
            put(whole, 0, 0, unit.rjust(_MARGIN - 1), "label")
        self._turns(whole)
        return whole

    def _turns(self, whole: Picture) -> None:
        last = self._height - 1
        put(whole, last, _MARGIN - 1, "└" + "─" * (self._width - _MARGIN), "axis")
        word = " turns"
        usual = max(2, self._width // 10)
        for most in range(usual, usual + 4):  # where the only figure would stand under the word, finer ones
            placed = list(self._figures(most, self._width - len(word)))
            if placed:
                break
        for column, text in placed:
            put(whole, last, column, text, "label")
        put(whole, last, self._width - len(word), word, "label")

    def _figures(self, most: int, end: int) -> Iterator[tuple[int, str]]:
        """Column and text of the turns that can stand left of `end`."""
        for value in round_steps(*self._across, most):
            text = f"{value:,.0f}".replace(",", " ")
            column = _MARGIN + self.x(value) // ACROSS - len(text) // 2
            if value > 0 and column + len(text) < end:
                yield column, text


def _kohm(value: float) -> str:
    return f"{value / 1000:g}"


def _per_cent(value: float) -> str:
    return f"{value:+g}%" if value else "0"
