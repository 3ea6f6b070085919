"""Named values, one a row."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence

from windctl.tui.pictures.cells import Picture, blank, put
from windctl.tui.widgets.drawing import Drawing


class Figures(Drawing):
    """Names on the left in the label's colour, values beside them; as many as there are rows. `wrapped`: a
    long value goes on in the next row."""

    def __init__(
        self, rows: Sequence[tuple[str, str]] = (), *, wrapped: bool = False, id: str | None = None
    ) -> None:
        super().__init__(id=id)
        self._wrapped = wrapped
        self.rows = tuple(rows)

    def show(self, rows: Sequence[tuple[str, str]]) -> None:
        """Show other values."""
        if tuple(rows) != self.rows:
            self.rows = tuple(rows)
            self.redraw()

    def drawn(self, width: int, height: int) -> Picture:
        """The rows that fit."""
        picture = blank(width, height)
        indent = max((len(name) for name, _ in self.rows), default=0) + 2
        rows = self.rows
        if self._wrapped:
            rows = tuple(
                (name if first else "", piece)
                for name, value in self.rows
                for first, piece in _pieces(value, max(width - indent, 8))
            )
        for row, (name, value) in enumerate(rows[:height]):
            put(picture, row, 0, name, "label")
            put(picture, row, indent, _cut(value, width - indent), "digits" if name == "finish" else None)
        return picture


def _cut(value: str, width: int) -> str:
    """It shows where there is more than there is room for."""
    return value if len(value) <= width else f"{value[: max(width - 1, 0)]}…"


def _pieces(value: str, width: int) -> list[tuple[bool, str]]:
    """A value in pieces that fit, and whether each is the first."""
    pieces = textwrap.wrap(value, width) or [""]
    return [(place == 0, piece) for place, piece in enumerate(pieces)]
