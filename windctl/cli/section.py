"""A section through the long side of a bobbin, drawn in characters: how the build is spread along the gap.

The core lies below, the flanges stand at the sides, the start flange left. To scale where the terminal's
cells are twice as high as wide. A cell is shaded by the turns in it, the first ones darkest, as far as
the winding is foreseen to grow evenly at each place.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import TextIO

from windctl.cli import present

_ROWS = 12  # for the flange's depth
_COLUMNS = (12, 60)
_EIGHTHS = " ▁▂▃▄▅▆▇█"
_QUARTERS_PLAIN = " .:##"
_SHADES = (94, 130, 172, 214)  # of 256 colours: copper, dark to bright
_TOO_HIGH = 196
_OVER = 2  # rows that are drawn above the flange's edge, at most


@dataclass(frozen=True, slots=True)
class Section:
    """heights_mm: of the winding on a long side, in equal parts of the gap from the start flange on."""

    heights_mm: Sequence[float]
    gap_mm: float
    depth_mm: float
    start_flange: str  # "face" or "base"


@dataclass(frozen=True, slots=True)
class Pen:
    """What the output can show: block characters instead of plain ones, and colours."""

    blocks: bool
    colour: bool

    @classmethod
    def of(cls, stream: TextIO, environ: Mapping[str, str]) -> Pen:
        """Plain text for anything but a terminal that shows more."""
        if not stream.isatty() or environ.get("TERM", "") == "dumb":
            return PLAIN
        return cls(blocks=present.takes_unicode(stream), colour=not environ.get("NO_COLOR"))


PLAIN = Pen(blocks=False, colour=False)


def drawn(section: Section, pen: Pen = PLAIN) -> list[str]:
    """The picture, line by line."""
    least, most = _COLUMNS
    columns = min(max(round(2 * _ROWS * section.gap_mm / section.depth_mm), least), most)
    row_mm = section.depth_mm / _ROWS
    heights = resampled(section.heights_mm, columns)
    over = min(max(math.ceil((max(heights) - section.depth_mm) / row_mm), 0), _OVER)
    far = "base" if section.start_flange == "face" else "face"
    near = f"{section.start_flange} (start)"
    top, flange = f"{section.depth_mm:g} mm", "█" if pen.blocks else "|"
    margin = max(len(top), len("0 mm"))
    lines = [f"{'':{margin}} {near:<{columns + 2 - len(far)}}{far}"]
    for row in range(_ROWS + over - 1, -1, -1):
        label = top if row == _ROWS - 1 else ""
        wall = flange if row < _ROWS else " "
        cells = "".join(_cells(heights, row, row_mm, section.depth_mm, pen))
        lines.append(f"{label:>{margin}} {wall}{cells}{wall}".rstrip())
    core = "▀" if pen.blocks else "="
    lines.append(f"{'0 mm':>{margin}} {core * (columns + 2)}")
    return lines


def resampled(heights: Sequence[float], columns: int) -> list[float]:
    """Means over `columns` equal parts of what is given in equal parts."""
    per_column = len(heights) / columns
    laid = [0.0]
    for height in heights:
        laid.append(laid[-1] + height)

    def up_to(at: float) -> float:
        whole = min(int(at), len(heights) - 1)
        return laid[whole] + (at - whole) * heights[whole]

    edges = [up_to(column * per_column) for column in range(columns + 1)]
    return [(after - before) / per_column for before, after in pairwise(edges)]


def _cells(heights: Sequence[float], row: int, row_mm: float, depth_mm: float, pen: Pen) -> list[str]:
    cells = []
    glyphs = _EIGHTHS if pen.blocks else _QUARTERS_PLAIN
    ink: int | None = None
    for height in heights:
        filled = min(max(height / row_mm - row, 0.0), 1.0)
        glyph = glyphs[round(filled * (len(glyphs) - 1))]
        wanted = _ink(height, row, row_mm, depth_mm) if pen.colour and glyph != " " else None
        if wanted != ink:
            cells.append("\x1b[0m" if wanted is None else f"\x1b[38;5;{wanted}m")
            ink = wanted
        cells.append(glyph)
    if ink is not None:
        cells.append("\x1b[0m")
    return cells


def _ink(height: float, row: int, row_mm: float, depth_mm: float) -> int:
    """The cell's colour: by how far up the winding it lies, and a warning above the flange's edge."""
    if row * row_mm >= depth_mm * (1 - 1e-9):
        return _TOO_HIGH
    share = (row + 0.5) * row_mm / max(height, 1e-9)
    return _SHADES[min(int(share * len(_SHADES)), len(_SHADES) - 1)]
