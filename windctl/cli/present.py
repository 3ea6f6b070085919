"""Where results and messages go, and how: results to standard output, everything else to standard error.

Numbers are written as `windctl.desk.numbers` writes them.
"""

from __future__ import annotations

import errno
import json
import os
import sys
from collections.abc import Sequence
from contextlib import suppress
from typing import Any, TextIO

import click

from windctl.desk.numbers import counted, duration, grouped, ohm, short_digest, turns, with_uncertainty

__all__ = [
    "counted",
    "duration",
    "grouped",
    "message",
    "ohm",
    "pairs",
    "result",
    "result_json",
    "short_digest",
    "table",
    "takes_unicode",
    "turns",
    "with_uncertainty",
    "writable",
]

_SPELT_OUT = str.maketrans({"±": "+-", "°": "deg ", "·": "-"})


def takes_unicode(stream: TextIO) -> bool:
    """Whether the stream's encoding has more than a handful of letters."""
    return (getattr(stream, "encoding", None) or "").lower().replace("-", "").startswith("utf")


def writable(text: str, stream: TextIO) -> str:
    """The text, with signs that the stream may lack spelt out."""
    return text if takes_unicode(stream) else text.translate(_SPELT_OUT)


def result(text: str = "") -> None:
    """A line of the answer itself. Raises BrokenPipeError where its reader has gone."""
    _echo(text, sys.stdout)


def result_json(answer: dict[str, Any]) -> None:
    """The answer as one JSON object with its `format`; refuses NaN and infinities, which are not JSON."""
    text = json.dumps(
        {"format": 1, **answer}, ensure_ascii=not takes_unicode(sys.stdout), allow_nan=False, indent=2
    )
    _echo(text, sys.stdout)


def message(text: str) -> None:
    """A line about the work: to standard error. Where nobody can read it any more, the work goes on."""
    with suppress(BrokenPipeError):
        _echo(text, sys.stderr)


def _echo(text: str, stream: TextIO) -> None:
    try:
        click.echo(writable(text, stream), file=stream)
    except OSError as error:
        if error.errno in (errno.EIO, errno.EPIPE):  # the terminal was closed, or the reader has gone
            forget(stream)
        if error.errno != errno.EIO:
            raise


def forget(stream: TextIO) -> None:
    """What is still buffered for a stream that nobody reads must not fail once more at exit."""
    with suppress(OSError, ValueError):
        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, stream.fileno())
        os.close(nowhere)


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
