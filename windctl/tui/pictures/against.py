"""Coils against the first of them: how much more resistance each has at the same turn, in per cent.

Two curves of some kilohm lie on each other where they differ by a part in a hundred; what tells is the
difference. Each coil has a letter besides its colour.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise

from windctl.shop.compare import at
from windctl.tui.pictures.axes import round_steps
from windctl.tui.pictures.braille import ACROSS, DOWN, Dots
from windctl.tui.pictures.cells import Ink, Picture, blank, put
from windctl.tui.pictures.curve import Point

MOST = 4  # coils besides the first
INKS: tuple[str, ...] = ("past", "finish", "good", "unsure")
LETTERS = "BCDE"
_MARGIN = 7
_EARLY = 0.05  # of the turns: before it, a part of a turn makes a difference of per cents


@dataclass(frozen=True, slots=True)
class Other:
    """A coil beside the first."""

    number: str
    points: tuple[Point, ...]


def differences(first: Sequence[Point], other: Sequence[Point]) -> list[tuple[float, float]]:
    """(turn, per cent) wherever both are known, the first turns left out."""
    base = [(point.turn, point.ohm) for point in first if point.ohm]
    if len(base) < 2:
        return []
    early = _EARLY * base[-1][0]
    found = []
    for point in other:
        ohm = at(base, point.turn) if point.turn >= early else None
        if point.ohm and ohm:
            found.append((point.turn, 100.0 * (point.ohm / ohm - 1.0)))
    return found


def against_picture(width: int, height: int, first: Sequence[Point], others: Sequence[Other]) -> Picture:
    """The differences over turns, on an axis as wide as the largest of them."""
    picture = blank(width, height)
    columns, rows = width - _MARGIN, height - 2  # a line of words above, the turns below
    drawn = [(other, differences(first, other.points)) for other in others[:MOST]]
    values = [value for _, points in drawn for _, value in points]
    if columns < 12 or rows < 2 or not values:
        put(picture, height // 2, 0, "no turn at which both were read"[:width], "label")
        return picture
    most_turns = max(turn for _, points in drawn for turn, _ in points)
    span = 1.15 * max(0.2, *(abs(value) for value in values))
    dots = Dots(columns, rows)

    def x(turn: float) -> int:
        return round(turn / most_turns * (dots.across - 1))

    def y(value: float) -> int:
        return round((value + span) / (2 * span) * (dots.down - 1))

    for place in range(0, dots.across, 3):
        dots.dot(place, y(0.0), "axis")
    for ink, (_, points) in zip(INKS, drawn, strict=False):
        for (t0, v0), (t1, v1) in pairwise(points):
            dots.line(x(t0), y(v0), x(t1), y(v1), ink)
    put(picture, 0, _MARGIN, "more than A at the same turn", "label")
    for row, cells in enumerate(dots.picture((*INKS, "axis")), 1):
        picture[row][_MARGIN:] = cells
    for row in range(1, rows + 1):
        put(picture, row, _MARGIN - 1, "│", "axis")
    for value in round_steps(-span, span, max(3, rows // 2)):
        row = rows - y(value) // DOWN
        text = f"{value:+g} %" if abs(value) > 1e-9 else "A"
        put(picture, row, 0, text.rjust(_MARGIN - 1), "label")
        put(picture, row, _MARGIN - 1, "┤", "axis")
    for letter, ink, (_, points) in zip(LETTERS, INKS, drawn, strict=False):
        if points:
            turn, value = points[-1]
            _letter(picture, rows - y(value) // DOWN, _MARGIN + x(turn) // ACROSS, letter, ink)
    _turns(picture, width, most_turns, lambda turn: _MARGIN + x(turn) // ACROSS)
    return picture


def _letter(picture: Picture, row: int, column: int, letter: str, ink: Ink) -> None:
    """At the end of its curve; one that is taken already moves to the left."""
    while column > _MARGIN and picture[row][column].char in LETTERS:
        column -= 2
    put(picture, row, column, letter, ink)


def _turns(picture: Picture, width: int, most: float, column: Callable[[float], int]) -> None:
    last = len(picture) - 1
    put(picture, last, _MARGIN - 1, "└" + "─" * (width - _MARGIN), "axis")
    word = " turns"
    for value in round_steps(0.0, most, max(2, width // 12)):
        text = f"{value:,.0f}".replace(",", " ")
        left = column(value) - len(text) // 2
        if value > 0 and left + len(text) < width - len(word):
            put(picture, last, left, text, "label")
    put(picture, last, width - len(word), word, "label")
