"""A target for a hand that guides the wire, drawn over the gap between the flanges: where it should be now,
which way it moves, and in large figures how many turns are left until it turns round."""

from __future__ import annotations

from math import ceil
from typing import TYPE_CHECKING

from windctl.tui.pictures.cells import Picture, blank, put
from windctl.tui.pictures.letters import lettered

if TYPE_CHECKING:
    from windctl.plan.by_hand import HandLay, HandPlace

HEIGHT = 5  # cells: the bar, its ground, and figures three rows high
_SOON = 3.0  # turns before a turn-round from which it says so
_BLOCK = 3  # cells of the target


def hand_picture(width: int, height: int, lay: HandLay, turn: float, turning: bool) -> Picture:
    """`width` cells over the gap, its walls in the first and the last."""
    picture = blank(width, height)
    if width < 16 or height < 2:
        return picture
    place = lay.at(turn)
    inner = width - 2
    put(picture, 0, 0, "▐" + "─" * inner + "▌", "axis")
    centre = min(inner - 1, max(0, int(place.mm / lay.gap_mm * inner)))
    left = 1 + min(inner - _BLOCK, max(0, centre - _BLOCK // 2))
    put(picture, 0, left, "█" * _BLOCK, "guide")
    arrows = "▶▶" if place.outward else "◀◀"
    beside = left + _BLOCK if place.outward else left - len(arrows)
    if beside > 0 and beside + len(arrows) < width:
        put(picture, 0, beside, arrows, "guide")
    _words(picture, place, turning)
    return picture


def _words(picture: Picture, place: HandPlace, turning: bool) -> None:
    soon = turning and place.turns_left <= _SOON
    figure = lettered("TURN" if soon else str(ceil(place.turns_left)))
    words = "hand here" if not turning else "NOW" if soon else "turns to go"
    for row, line in enumerate(figure, 1):
        put(picture, row, 2, line, "unsure" if soon else "digits")
    at = len(figure[0]) + 4
    put(picture, 2, at, words, "unsure" if soon else None)
    put(picture, 3, at, f"at {place.mm:.1f} mm, to the {place.towards}", "label")
