"""A field of fine dots, two by four in a cell, in layers: the topmost one with a dot gives a cell its ink."""

from __future__ import annotations

from collections.abc import Sequence

from windctl.tui.pictures.cells import BLANK, Cell, Picture

ACROSS, DOWN = 2, 4  # dots in a cell
_BITS = ((0x01, 0x02, 0x04, 0x40), (0x08, 0x10, 0x20, 0x80))  # [column][row from the top]


class Dots:
    """`width` by `height` cells of dots; dot (0, 0) is at the lower left."""

    def __init__(self, width: int, height: int) -> None:
        self.across, self.down = width * ACROSS, height * DOWN
        self._width, self._height = width, height
        self._layers: dict[str, dict[tuple[int, int], int]] = {}

    def dot(self, x: int, y: int, layer: str) -> None:
        """Set one dot; outside the field it is left out."""
        if 0 <= x < self.across and 0 <= y < self.down:
            cells = self._layers.setdefault(layer, {})
            row, up = divmod(self.down - 1 - y, DOWN)
            cell = (row, x // ACROSS)
            cells[cell] = cells.get(cell, 0) | _BITS[x % ACROSS][up]

    def line(self, x0: float, y0: float, x1: float, y1: float, layer: str) -> None:
        """A straight line of dots without gaps."""
        steps = max(1, round(max(abs(x1 - x0), abs(y1 - y0))))
        for step in range(steps + 1):
            self.dot(round(x0 + (x1 - x0) * step / steps), round(y0 + (y1 - y0) * step / steps), layer)

    def picture(self, order: Sequence[str]) -> Picture:
        """The cells; of the layers in a cell, the first in `order` gives the ink, all give their dots."""
        rows: Picture = [[BLANK] * self._width for _ in range(self._height)]
        for layer in reversed(order):
            for (row, column), bits in self._layers.get(layer, {}).items():
                before = rows[row][column]
                under = ord(before.char) - 0x2800 if before is not BLANK else 0
                rows[row][column] = Cell(chr(0x2800 + (under | bits)), layer)
        return rows
