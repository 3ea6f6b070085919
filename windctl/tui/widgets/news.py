"""The last facts of a run in plain words, the latest at the bottom."""

from __future__ import annotations

from collections.abc import Sequence

from windctl.tui.pictures.cells import Picture, blank, put
from windctl.tui.widgets.drawing import Drawing


class News(Drawing):
    """As many of the latest lines as there are rows; a long one goes on in the next row."""

    def __init__(self, *, id: str | None = None) -> None:
        super().__init__(id=id)
        self.lines: tuple[tuple[str, str], ...] = ()

    def show(self, lines: Sequence[tuple[str, str]]) -> None:
        """Show other lines: when, and what."""
        if tuple(lines) != self.lines:
            self.lines = tuple(lines)
            self.redraw()

    def drawn(self, width: int, height: int) -> Picture:
        """The latest lines."""
        picture = blank(width, height)
        rows: list[tuple[str, str]] = []
        for when, what in self.lines[-height:]:
            first = True
            for piece in _pieces(what, max(width - 7, 8)):
                rows.append((when if first else "", piece))
                first = False
        for row, (when, what) in enumerate(rows[-height:]):
            put(picture, row, 0, when.rjust(5), "label")
            put(picture, row, 7, what)
        return picture


def _pieces(text: str, width: int) -> list[str]:
    pieces = [""]
    for word in text.split():
        longer = f"{pieces[-1]} {word}".strip()
        if len(longer) <= width or not pieces[-1]:
            pieces[-1] = longer
        else:
            pieces.append(word)
    return pieces
