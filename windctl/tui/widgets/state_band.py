"""The band across the screen: what the machine does, and what it does next."""

from __future__ import annotations

from windctl.tui.looks import Look, look_of
from windctl.tui.pictures.cells import Cell, Ink, Picture
from windctl.tui.pictures.letters import lettered, lettered_width
from windctl.tui.view import Next
from windctl.tui.widgets.drawing import Drawing

_INK: Ink = "on-band"


class StateBand(Drawing):
    """Three rows: the state's word in large letters on its colour; what comes next beside it."""

    DEFAULT_CSS = "StateBand { height: 3; }"

    def __init__(self, *, id: str | None = None) -> None:
        super().__init__(id=id)
        self.look: Look = look_of("connecting")
        self.next = Next("")

    def show(self, look: Look, coming: Next) -> None:
        """Show another state."""
        if (look, coming) != (self.look, self.next):
            self.look, self.next = look, coming
            self.redraw()

    def drawn(self, width: int, height: int) -> Picture:
        """Word on the left, what comes next on the right."""
        paper = self.look.role
        picture: Picture = [[Cell(" ", _INK, paper)] * width for _ in range(height)]
        self._write(picture, 1, 2, self.look.glyph)
        word = lettered(self.look.word)
        if self._room_beside(width):
            for row, line in enumerate(word):
                self._write(picture, row, 5, line)
            at = 5 + len(word[0]) + 3
        else:
            self._write(picture, 1, 5, self.look.word.upper())
            at = 5 + len(self.look.word) + 3
        self._next(picture, at, width)
        return picture

    def _room_beside(self, width: int) -> bool:
        """The word may be large as long as what comes next is whole beside it."""
        room = width - lettered_width(self.look.word) - 9
        coming = self.next
        words = _wrapped(f"{coming.words} {coming.figure}".strip(), max(room, 1), 2)
        return room >= width // 3 - 3 and all(len(line) <= room for line in (*words, coming.when))

    def _next(self, picture: Picture, at: int, width: int) -> None:
        coming = self.next
        figure = lettered(coming.figure) if coming.figure else []
        room = width - at - 1
        if figure and len(figure[0]) + max(len(coming.words), 9) + 2 <= room:
            self._write(picture, 1, at, coming.words)
            left = at + len(coming.words) + 2
            for row, line in enumerate(figure):
                self._write(picture, row, left, line)
            right = left + len(figure[0]) + 3
            if right + len(coming.when) < width:
                self._write(picture, 1, right, coming.when)
            elif room >= len(coming.when):
                self._write(picture, 0, at, coming.when.rpartition(", ")[2][: len(coming.words) + 2])
            return
        words = f"{coming.words} {coming.figure}".strip()
        lines = _wrapped(words, room, 2) + ([coming.when] if coming.when else [])
        for row, line in enumerate(lines[:3], 0 if len(lines) > 1 else 1):
            self._write(picture, row, at, line[:room])

    def _write(self, picture: Picture, row: int, column: int, text: str) -> None:
        line = picture[row] if row < len(picture) else []
        for place, char in enumerate(text, column):
            if 0 <= place < len(line):
                line[place] = Cell(char, _INK, self.look.role)


def _wrapped(words: str, width: int, most: int) -> list[str]:
    """At most `most` lines of whole words; the last is cut."""
    lines = [""]
    for word in words.split():
        longer = f"{lines[-1]} {word}".strip()
        if len(longer) <= width or not lines[-1] or len(lines) == most:
            lines[-1] = longer
        else:
            lines.append(word)
    return lines
