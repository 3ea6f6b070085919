"""What is known of a wire's resistance per metre beside what the table says, both with their 95 %."""

from __future__ import annotations

from windctl.tui.pictures.axes import round_steps
from windctl.tui.pictures.cells import Ink, Picture, blank, put

_NAMES = 7  # cells left of the field


def known_picture(width: int, height: int, table_rel: float, off_rel: float, rel: float) -> Picture:
    """Three rows: the table's interval, what is known now, and an axis in per cent of the table's value.

    `table_rel`, `rel`: half-widths (95 %) as parts of the table's value; `off_rel`: how far what is known
    lies beside it.
    """
    picture = blank(width, height)
    most = 1.15 * max(table_rel, abs(off_rel) + rel, 1e-4)
    columns = width - _NAMES
    if columns < 20 or height < 3:
        return picture

    def at(part: float) -> int:
        return _NAMES + round((part + most) / (2 * most) * (columns - 1))

    put(picture, 0, 0, "table", "label")
    put(picture, 1, 0, "now", "label")
    for row in (0, 1):
        put(picture, row, at(0.0), "┊", "axis")
    _interval(picture, 0, at(-table_rel), at(0.0), at(table_rel), "label")
    _interval(picture, 1, at(off_rel - rel), at(off_rel), at(off_rel + rel), "finish")
    put(picture, 2, _NAMES, "─" * columns, "axis")
    for value in round_steps(-100 * most, 100 * most, max(3, columns // 12)):
        words = f"{value:+g} %" if abs(value) > 1e-9 else "table"
        put(
            picture,
            2,
            max(_NAMES, min(width - len(words), at(value / 100) - len(words) // 2)),
            words,
            "label",
        )
    return picture


def _interval(picture: Picture, row: int, left: int, middle: int, right: int, ink: Ink) -> None:
    put(picture, row, left, "━" * max(1, right - left + 1), ink)
    put(picture, row, left, "┣", ink)
    put(picture, row, right, "┫", ink)
    put(picture, row, middle, "◆", ink)
