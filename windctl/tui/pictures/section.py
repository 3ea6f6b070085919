"""A section through the bobbin: the gap between the flanges as it fills, wire shaded by its turn.

Bottom: the core's surface, with the flange the lay starts from on the left. The walls are as high as the
flanges are deep. The pale ground is what the plan foresees for the finished coil. The guide stands above,
with the wire running down to where it lies.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from windctl.tui.pictures.cells import BLANK, Cell, Ink, Picture, blank, put

if TYPE_CHECKING:
    from windctl.plan.growth import Growth

_EIGHTHS = " ▁▂▃▄▅▆▇█"


@dataclass(frozen=True, slots=True)
class Filled:
    """How far the coil is: turns wound, and the guide in mm from its zero, where it is known."""

    turns: float
    guide_mm: float | None = None


class Section:
    """One bobbin at one size of drawing; made once, drawn many times."""

    def __init__(self, growth: Growth, width: int, height: int) -> None:
        self._growth = growth
        self.width, self.height = max(width, 8), max(height, 4)
        self._columns = self.width - 2
        self._rows = self.height - 2  # the guide's row above, the core's below
        self._stages = [self._sampled(stage) for stage in growth.heights_mm]
        self._final = self._stages[-1]

    def picture(self, filled: Filled) -> Picture:
        """The cells, `height` rows of `width`."""
        picture = blank(self.width, self.height)
        now = self._sampled(self._growth.at(filled.turns))
        for column in range(self._columns):
            self._column(picture, column, now[column])
        for row in range(self._rows + 1):
            picture[row + 1][0] = Cell("▐", "flange")
            picture[row + 1][-1] = Cell("▌", "flange")
        self._guide(picture, filled.guide_mm, now)
        self._core(picture)
        return picture

    def _sampled(self, heights_mm: tuple[float, ...]) -> list[float]:
        """Heights in eighths of a cell, column by column."""
        eighths = self._rows * 8 / self._growth.depth_mm
        parts = len(heights_mm)
        out = []
        for column in range(self._columns):
            first = column * parts // self._columns
            last = max(first + 1, (column + 1) * parts // self._columns)
            out.append(sum(heights_mm[first:last]) / (last - first) * eighths)
        return out

    def _column(self, picture: Picture, column: int, now: float) -> None:
        full, final = round(now), round(self._final[column])
        most = self._rows * 8
        for row in range(self._rows):
            low = row * 8  # eighths at the cell's lower edge
            place = picture[self._rows - row]
            ghost: Ink = "ghost" if final >= low + 8 else None
            if full >= low + 8:
                upper, lower = self._shade(column, low + 6), self._shade(column, low + 2)
                place[column + 1] = Cell("▀", upper, lower)
                if low + 8 >= most and full > most:
                    place[column + 1] = Cell("▲", "over", upper)
            elif full > low:
                place[column + 1] = Cell(_EIGHTHS[full - low], self._shade(column, full), ghost)
            elif final >= low + 8:
                place[column + 1] = Cell(" ", None, "ghost")
            elif final > low:
                place[column + 1] = Cell(_EIGHTHS[final - low], "ghost")

    def _shade(self, column: int, eighths: float) -> float:
        """When the build first reached this height, as a part of the planned turns."""
        before = 0.0
        last = len(self._stages) - 1
        for stage, heights in enumerate(self._stages):
            height = heights[column]
            if height >= eighths:
                share = (eighths - before) / (height - before) if height > before else 1.0
                return max(0.0, min(1.0, (stage - 1 + share) / last))
            before = height
        return 1.0

    def _guide(self, picture: Picture, guide_mm: float | None, now: list[float]) -> None:
        if guide_mm is None:
            return
        part = (self._growth.datum_mm + guide_mm) / self._growth.gap_mm
        column = max(0, min(self._columns - 1, int(part * self._columns)))
        picture[0][column + 1] = Cell("▼", "guide")
        for row in range(self._rows, 0, -1):
            if round(now[column]) <= (row - 1) * 8:
                line = picture[self._rows - row + 1]
                line[column + 1] = Cell("│", "guide", line[column + 1].paper or self._ghost(column, row))

    def _ghost(self, column: int, row: int) -> Ink:
        return "ghost" if round(self._final[column]) >= row * 8 else None

    def _core(self, picture: Picture) -> None:
        last = self.height - 1
        picture[last] = [BLANK] + [Cell("▀", "core")] * self._columns + [BLANK]
        start = self._growth.start_flange
        other = "base" if start == "face" else "face"
        put(picture, last, 0, f" {start} ", "label")
        put(picture, last, self.width - len(other) - 2, f" {other} ", "label")
