"""Named values, one a row."""

from __future__ import annotations

from collections.abc import Sequence

from windctl.tui.pictures.cells import Picture, blank, put
from windctl.tui.widgets.drawing import Drawing


class Figures(Drawing):
    """Names on the left in the label's colour, values beside them; as many as there are rows."""

    def __init__(self, rows: Sequence[tuple[str, str]] = (), *, id: str | None = None) -> None:
        super().__init__(id=id)
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
        for row, (name, value) in enumerate(self.rows[:height]):
            put(picture, row, 0, name, "label")
            put(picture, row, indent, value, "digits" if name == "finish" else None)
        return picture
