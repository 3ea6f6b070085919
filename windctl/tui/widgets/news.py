"""The last facts of a run in plain words, the latest at the bottom."""

from __future__ import annotations

from collections.abc import Sequence

from windctl.tui.pictures.cells import Picture, blank, put
from windctl.tui.widgets.drawing import Drawing


class News(Drawing):
    """As many of the latest as there are rows for, each whole; a long one goes on in the next row."""

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
        latest = self.lines[-height:]
        clock = max((len(when) for when, _ in latest), default=0)
        clock = max(clock, 5)  # a minute and an hour stand in the same column
        rows: list[tuple[str, str]] = []
        for when, what in reversed(latest):
            pieces = _pieces(what, max(width - clock - 2, 8))
            if rows and len(rows) + len(pieces) > height:
                break  # the end of a sentence says nothing
            rows[:0] = [(when if at == 0 else "", piece) for at, piece in enumerate(pieces)]
        for row, (when, what) in enumerate(rows[:height]):
            put(picture, row, 0, when.rjust(clock), "label")
            put(picture, row, clock + 2, what)
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
