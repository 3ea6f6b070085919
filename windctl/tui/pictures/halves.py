"""Dots, two in a cell one above the other, from a drawing in letters: `#` is a dot."""

from __future__ import annotations

from collections.abc import Sequence

_HALVES = {(False, False): " ", (True, False): "▀", (False, True): "▄", (True, True): "█"}


def halves(dots: Sequence[str]) -> list[str]:
    """Rows of cells from rows of dots; an odd last row gets an empty one beneath it."""
    rows = [*dots, " " * len(dots[0])] if len(dots) % 2 else list(dots)
    return [
        "".join(_HALVES[above == "#", below == "#"] for above, below in zip(upper, lower, strict=True))
        for upper, lower in zip(rows[::2], rows[1::2], strict=True)
    ]
