"""Where results and messages go, and how: results to standard output, everything else to standard error.

Numbers are written as `windctl.desk.numbers` writes them.
"""

from __future__ import annotations

import errno
import json
import os
import sys
from collections.abc import Iterable, Sequence
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
    "result_json_rows",
    "short_digest",
    "table",
    "takes_unicode",
    "turns",
    "with_uncertainty",
    "writable",
]

_AT_ONCE = 500  # lines of a long answer that are written at once

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
    _echo(_json({"format": 1, **answer}, indent=2), sys.stdout)


def result_json_rows(name: str, rows: Iterable[dict[str, Any]]) -> None:
    """The same where the answer is one list that may be long, under `name`: a row on each line, written as
    they come."""
    lines, before = [f'{{"format": 1, {_json(name)}: ['], "\n"
    for row in rows:
        lines.append(f"{before}  {_json(row)}")
        before = ",\n"
        if len(lines) >= _AT_ONCE:
            _echo("".join(lines), sys.stdout, nl=False)
            lines = []
    _echo("".join(lines) + "\n]}", sys.stdout)


def _json(answer: Any, indent: int | None = None) -> str:
    return json.dumps(answer, ensure_ascii=not takes_unicode(sys.stdout), allow_nan=False, indent=indent)


def message(text: str) -> None:
    """A line about the work: to standard error. Where nobody can read it any more, the work goes on."""
    with suppress(BrokenPipeError):
        _echo(text, sys.stderr)


def _echo(text: str, stream: TextIO, *, nl: bool = True) -> None:
    try:
        click.echo(writable(text, stream), file=stream, nl=nl)
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
    cells = [header, *rows]
    widths = [max(map(len, column)) for column in zip(*cells, strict=True)]
    aligned = "".join(">" if right[at : at + 1] == "r" else "<" for at in range(len(header)))
    form = "  ".join(f"{{:{side}{width}}}" for side, width in zip(aligned, widths, strict=True))
    for at in range(0, len(cells), _AT_ONCE):
        result("\n".join([form.format(*row).rstrip() for row in cells[at : at + _AT_ONCE]]))
