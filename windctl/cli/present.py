"""Where results and messages go, and how: results to standard output, everything else to standard error.

Numbers are written as `windctl.desk.numbers` writes them.
"""

from __future__ import annotations

import errno
import json
import os
import re
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

_LEAST_CELL = 1  # cells of a text's line, however narrow the terminal
_TO_COPY = re.compile(r"\bwindctl [a-z]")
_DRAWN = re.compile(r"\S {3,}\S")  # words that stand so far apart have their places
_AT_ONCE = 500  # lines of a long answer that are written at once

_SPELT_OUT = str.maketrans({"±": "+-", "°": "deg ", "·": "-"})


def takes_unicode(stream: TextIO) -> bool:
    """Whether the stream's encoding has more than a handful of letters."""
    return (getattr(stream, "encoding", None) or "").lower().replace("-", "").startswith("utf")


def writable(text: str, stream: TextIO) -> str:
    """The text, with signs that the stream may lack spelt out."""
    return text if takes_unicode(stream) else text.translate(_SPELT_OUT)


def result(text: str = "", under: int = 0) -> None:
    """A line of the answer itself; on a narrow terminal it goes on `under` so many cells. Raises
    BrokenPipeError where its reader has gone."""
    _echo(folded(text, room(sys.stdout), under), sys.stdout)


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
        _echo(folded(text, room(sys.stderr)), sys.stderr)


def room(stream: TextIO) -> int | None:
    """Cells in a line of the terminal behind `stream`; None where there is none, and lines have no end."""
    try:
        return os.get_terminal_size(stream.fileno()).columns or None
    except (OSError, ValueError):
        return None


def folded(text: str, width: int | None, under: int = 0) -> str:
    """The text in lines of at most `width` cells, parted between words; what follows a line's first is set in
    by `under` cells. What has no place to be parted, such as a digest or a drawing, and what is to be copied,
    a command, is left to the terminal.
    """
    if width is None:
        return text
    lines = []
    for line in text.split("\n"):
        drawing = not under and _DRAWN.search(line) is not None
        if len(line) <= width or drawing or _TO_COPY.search(line):
            lines.append(line)
            continue
        parts = _wrapped(line, width, under)
        lines.extend(parts)
    return "\n".join(lines)


def _wrapped(line: str, width: int, under: int) -> list[str]:
    import textwrap

    return textwrap.wrap(
        line,
        max(width, under + _LEAST_CELL),
        subsequent_indent=" " * under,
        drop_whitespace=True,
        break_long_words=False,
        break_on_hyphens=False,
    )


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
        line = f"{name:<{width}}  {value}".rstrip()
        _echo(folded(line, room(sys.stdout), width + 2), sys.stdout)


def table(header: Sequence[str], rows: Sequence[Sequence[str]], right: str = "") -> None:
    """Columns of the answer; those whose place in `right` holds "r" are set to the right.

    Where a terminal is too narrow for them, texts go on below themselves; figures are never parted.
    """
    to_right = [right[at : at + 1] == "r" for at in range(len(header))]
    lines = in_columns([header, *rows], to_right, room(sys.stdout))
    for at in range(0, len(lines), _AT_ONCE):
        _echo("\n".join(lines[at : at + _AT_ONCE]), sys.stdout)


def in_columns(
    rows: Sequence[Sequence[str]], to_right: Sequence[bool], width: int | None = None
) -> list[str]:
    """The rows as lines, in columns as wide as their widest cell; or, where that is too wide for `width` and
    the longest words are not, as narrow as it asks."""
    widths = [max(map(len, column)) for column in zip(*rows, strict=True)]
    gap, least = 2, list(widths)
    if width is not None and sum(widths) + gap * (len(widths) - 1) > width:
        for at, column in enumerate(zip(*rows, strict=True)):
            if not to_right[at]:
                least[at] = max((len(word) for cell in column for word in cell.split()), default=0)
        gap = 2 if sum(least) + 2 * (len(widths) - 1) <= width else 1
        too_wide = sum(widths) + gap * (len(widths) - 1) - width
        if sum(least) + gap * (len(widths) - 1) > width:
            gap, too_wide = 2, 0
        for _ in range(too_wide):
            widest = max(range(len(widths)), key=lambda at: (widths[at] > least[at], widths[at]))
            widths[widest] = max(widths[widest] - 1, least[widest])
    form = (" " * gap).join(
        f"{{:{'>' if side else '<'}{cells}}}" for side, cells in zip(to_right, widths, strict=True)
    )
    lines = []
    for row in rows:
        if all(len(cell) <= cells for cell, cells in zip(row, widths, strict=True)):
            lines.append(form.format(*row).rstrip())
            continue
        parts = [
            _wrapped(cell, cells, 0) if len(cell) > cells else [cell]
            for cell, cells in zip(row, widths, strict=True)
        ]
        for n in range(max(map(len, parts))):
            lines.append(form.format(*(part[n] if n < len(part) else "" for part in parts)).rstrip())
    return lines
