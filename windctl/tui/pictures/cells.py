"""What a drawing is made of: cells with an ink and a paper, which a theme turns into colours.

An ink is a role's name, or a number from 0 to 1: the shade of wire by its turn, first to last.
"""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache
from typing import NamedTuple

Ink = str | float | None


class Cell(NamedTuple):
    """One character. None: the colour of whatever lies beneath."""

    char: str = " "
    ink: Ink = None
    paper: Ink = None


BLANK = Cell()


@lru_cache(maxsize=4096)
def cell(char: str, ink: Ink = None, paper: Ink = None) -> Cell:
    """A cell that is made once: text is drawn eight times a second, and most of it is the same."""
    return Cell(char, ink, paper)


Picture = list[list[Cell]]


def blank(width: int, height: int) -> Picture:
    """Nothing, `height` rows of `width` cells."""
    return [[BLANK] * width for _ in range(height)]


def put(picture: Picture, row: int, column: int, text: str, ink: Ink = None) -> None:
    """Write `text` from a cell on; what falls outside is left out, paper stays."""
    if not 0 <= row < len(picture):
        return
    line = picture[row]
    for place, char in enumerate(text, column):
        if 0 <= place < len(line):
            line[place] = cell(char, ink, line[place].paper)


def texts(picture: Sequence[Sequence[Cell]]) -> list[str]:
    """The characters alone, row by row."""
    return ["".join(cell.char for cell in row) for row in picture]
