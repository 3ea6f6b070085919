"""How numbers are written for people, and where results and messages go.

Results go to standard output, everything else to standard error. A number keeps as many digits as its
uncertainty carries meaning (two significant ones); resistances of 1000 ohm and more are written in kohm, as
meters show them. Thousands are parted by a space, never by a sign that could be a decimal one.
"""

from __future__ import annotations

import json
import math
import sys
from collections.abc import Sequence
from typing import Any, TextIO

import click

_SPELT_OUT = str.maketrans({"±": "+-", "°": "deg ", "·": "-"})


def takes_unicode(stream: TextIO) -> bool:
    """Whether the stream's encoding has more than a handful of letters."""
    return (getattr(stream, "encoding", None) or "").lower().replace("-", "").startswith("utf")


def writable(text: str, stream: TextIO) -> str:
    """The text, with signs that the stream may lack spelt out."""
    return text if takes_unicode(stream) else text.translate(_SPELT_OUT)


def result(text: str = "") -> None:
    """A line of the answer itself."""
    click.echo(writable(text, sys.stdout))


def result_json(answer: dict[str, Any]) -> None:
    """The answer as one JSON object with its `format`; refuses NaN and infinities, which are not JSON."""
    text = json.dumps(
        {"format": 1, **answer}, ensure_ascii=not takes_unicode(sys.stdout), allow_nan=False, indent=2
    )
    click.echo(text)


def message(text: str) -> None:
    """A line about the work: to standard error."""
    click.echo(writable(text, sys.stderr), err=True)


def grouped(value: float, decimals: int = 0) -> str:
    """`7946.25` to `7 946.2` with one decimal; a rounded zero has no sign."""
    text = f"{value:,.{decimals}f}".replace(",", " ")
    return text[1:] if text.startswith("-") and not text.strip("-0. ") else text


def with_uncertainty(value: float, half_width: float, unit: str, most_decimals: int = 9) -> str:
    """`7.946 ± 0.031 kohm`: the half-width to two significant digits, the value to the same place.

    `unit` "ohm" becomes "kohm" from 1000 on. A half-width that is not positive and finite is left out.
    """
    if unit == "ohm" and abs(value) >= 1000:
        value, half_width, unit = value / 1000, half_width / 1000, "kohm"
    if not (math.isfinite(half_width) and half_width > 0):
        return f"{grouped(value, 3 if unit == 'kohm' else 0)} {unit}"
    decimals = min(max(1 - math.floor(math.log10(half_width)), 0), most_decimals)
    return f"{grouped(value, decimals)} ± {grouped(half_width, decimals)} {unit}"


def ohm(value: float, half_width: float = 0.0) -> str:
    """A resistance: `7.946 kohm`, `812.4 ohm`, with ± where its 95 % half-width is known."""
    if half_width > 0:
        return with_uncertainty(value, half_width, "ohm")
    return f"{grouped(value / 1000, 3)} kohm" if abs(value) >= 1000 else f"{grouped(value, 1)} ohm"


def turns(value: float, half_width: float = 0.0) -> str:
    """A number of turns: whole ones without decimals."""
    if half_width > 0:
        return with_uncertainty(value, half_width, "turns", most_decimals=1)
    return f"{grouped(value, 0 if float(value).is_integer() else 2)} turns"


def duration(seconds: float) -> str:
    """`0:45`, `8:05`, `1:02:10`."""
    whole = max(0, round(seconds))
    hours, rest = divmod(whole, 3600)
    minutes, left = divmod(rest, 60)
    return f"{hours}:{minutes:02d}:{left:02d}" if hours else f"{minutes}:{left:02d}"


def short_digest(digest: str) -> str:
    """The first 16 characters of a digest: enough to compare by eye."""
    return digest[:16]


def pairs(rows: Sequence[tuple[str, str]]) -> None:
    """Named values of the answer, one a line, aligned."""
    width = max((len(name) for name, _ in rows), default=0)
    for name, value in rows:
        result(f"{name:<{width}}  {value}".rstrip())


def table(header: Sequence[str], rows: Sequence[Sequence[str]], right: str = "") -> None:
    """Columns of the answer; those whose place in `right` holds "r" are set to the right."""
    cells = [list(header), *[list(row) for row in rows]]
    widths = [max(len(row[column]) for row in cells) for column in range(len(header))]
    for row in cells:
        result(
            "  ".join(
                cell.rjust(width) if right[column : column + 1] == "r" else cell.ljust(width)
                for column, (cell, width) in enumerate(zip(row, widths, strict=True))
            ).rstrip()
        )
