"""Digits to be read from across a room: strokes of any size, drawn here from seven places.

Each digit is a box of dots; its strokes are bars along the box and its middle. Outer corners where two bars
meet are cut, which makes 0, 3, 6, 8 and 9 round and keeps 1, 4 and 7 sharp.
"""

from __future__ import annotations

from functools import lru_cache

from windctl.tui.pictures.halves import halves

_STROKES = {  # top, upper right, lower right, bottom, lower left, upper left, middle
    "0": "trRbLl",
    "1": "rR",
    "2": "trmLb",
    "3": "trmRb",
    "4": "lmrR",
    "5": "tlmRb",
    "6": "tlmLRb",
    "7": "trR",
    "8": "trRbLlm",
    "9": "tlrmRb",
}
_GAP = 1  # dots between two characters
_BAR = 2  # dots across a stroke


def digit_width(height: int) -> int:
    """Dots across one digit that is `height` cells high."""
    return max(5, round(height * 1.4))


def big_digits(text: str, height: int, most: int = 1_000) -> list[str]:
    """`height` rows of cells for digits, `.`, `-` and spaces; a space is a narrow gap.

    The digits are made narrower, down to five dots, where that is what it takes to fit into `most` cells.
    """
    tall = height * 2
    wide = digit_width(height)
    while wide > 5 and _width(text, wide) > most:
        wide -= 1
    glyphs = [_halved(char, tall, wide) for char in text]
    return [(" " * _GAP).join(glyph[row] for glyph in glyphs) for row in range(height)]


def _width(text: str, wide: int) -> int:
    return sum(2 if char in " ." else wide for char in text) + _GAP * (len(text) - 1)


@lru_cache(maxsize=128)
def _halved(char: str, tall: int, wide: int) -> list[str]:
    return halves(_glyph(char, tall, wide))


def _glyph(char: str, tall: int, wide: int) -> list[str]:
    if char == " ":
        return [" " * 2] * tall
    if char == ".":
        return [" " * _BAR] * (tall - 2) + ["#" * _BAR] * 2
    dots = [[False] * wide for _ in range(tall)]
    middle = tall // 2 - 1
    if char == "-":
        _bar(dots, middle, 1, middle + _BAR, wide - 1)
        return _lines(dots)
    strokes = _STROKES[char]
    boxes = {
        "t": (0, 0, _BAR, wide),
        "b": (tall - _BAR, 0, tall, wide),
        "m": (middle, 0, middle + _BAR, wide),
        "l": (0, 0, middle + 1, _BAR),
        "L": (middle + 1, 0, tall, _BAR),
        "r": (0, wide - _BAR, middle + 1, wide),
        "R": (middle + 1, wide - _BAR, tall, wide),
    }
    for stroke in strokes:
        _bar(dots, *boxes[stroke])
    if char == "1":  # a flag, so that it is no mere bar
        _bar(dots, 1, wide - _BAR - 2, 3, wide - _BAR)
    for row, column, beside in ((0, 0, "tl"), (0, -1, "tr"), (-1, 0, "bL"), (-1, -1, "bR")):
        if set(beside) <= set(strokes):
            dots[row][column] = False
    return _lines(dots)


def _bar(dots: list[list[bool]], top: int, left: int, bottom: int, right: int) -> None:
    for row in range(top, bottom):
        for column in range(left, right):
            dots[row][column] = True


def _lines(dots: list[list[bool]]) -> list[str]:
    return ["".join("#" if dot else " " for dot in row) for row in dots]
