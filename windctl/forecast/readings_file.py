"""Readings files: CSV with the header `turn,ohm,celsius`, and what may stand beside it.

Optional columns are `sd_ohm`, `state` (rest, turning), `seconds` and `event` (splice, new wire), in any
order. `#` starts a comment. Fields are separated by commas, with a decimal point, or by semicolons, with a
decimal point or comma. Resistances may carry a `k`. An open circuit is written `inf`. All problems of a
file come at once.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from windctl.errors import Problem, ReadingsError
from windctl.forecast.reading import Reading, canonical_key
from windctl.forms.faults import shorten
from windctl.forms.source import read_text, text_of

MAX_BYTES = 64 * 1024 * 1024
NEEDED = ("turn", "ohm", "celsius")
OPTIONAL = ("sd_ohm", "state", "seconds", "event")
EVENTS = ("splice", "new wire")
STATES = ("rest", "turning")
MOST_TURNS = 1_000_000
COLDEST_C, WARMEST_C = -40.0, 150.0

_NUMBER = re.compile(r"[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?", re.ASCII)
_COMMA_NUMBER = re.compile(r"[+-]?(?:\d+[.,]?\d*|[.,]\d+)(?:[eE][+-]?\d+)?", re.ASCII)
_LINE_END = re.compile(r"\r\n|\r|\n")
_INFINITE = ("inf", "+inf", "infinity", "+infinity")


@dataclass(frozen=True, slots=True)
class ReadingLine:
    """One line of a readings file: a reading, and what happened at its turn right after it."""

    line: int
    reading: Reading
    event: str | None = None


def load_readings(path: Path) -> list[ReadingLine]:
    """The readings of a file in canonical order. Raises ReadingsError with every problem."""
    return _parse(read_text(path, ReadingsError, MAX_BYTES), str(path))


def parse_readings(text: str, file: str = "readings") -> list[ReadingLine]:
    """The readings in a text; `file` names it in messages. Raises ReadingsError with every problem."""
    return _parse(text_of(text.encode("utf-8", "surrogatepass"), file, ReadingsError, MAX_BYTES), file)


def canonical_order(lines: list[ReadingLine]) -> list[ReadingLine]:
    """By turn; of equal turns events last, since they are about what is wound from there on."""
    return sorted(
        lines,
        key=lambda each: (
            each.reading.turn,
            each.event is not None,
            canonical_key(each.reading),
            each.event or "",
        ),
    )


def _parse(text: str, file: str) -> list[ReadingLine]:
    reader = _Reader(file)
    for number, line in enumerate(_LINE_END.split(text.removeprefix("\ufeff")), start=1):
        content = line.partition("#")[0]
        if content.strip():
            reader.take(number, content)
    return canonical_order(reader.finished())


class _Reader:
    """Takes line after line, and remembers every problem."""

    def __init__(self, file: str) -> None:
        self._file = file
        self._problems: list[Problem] = []
        self._columns: list[str] | None = None
        self._separator = ","
        self._lines: list[ReadingLine] = []

    def take(self, number: int, content: str) -> None:
        if self._columns is None:
            self._take_header(number, content)
        else:
            self._take_reading(number, content, self._columns)

    def finished(self) -> list[ReadingLine]:
        if self._columns is None and not self._problems:
            self._complain(0, 0, f"is empty: it needs the header {','.join(NEEDED)}")
        if self._problems:
            raise ReadingsError(self._problems)
        return self._lines

    def _complain(self, line: int, column: int, text: str) -> None:
        self._problems.append(Problem(self._file, line, column, text))

    def _take_header(self, number: int, content: str) -> None:
        self._separator = ";" if ";" in content else ","
        columns = [name.strip().strip('"').lower() for name in content.split(self._separator)]
        self._columns = columns
        places = _places(content, self._separator)
        for i, name in enumerate(columns):
            if name not in NEEDED + OPTIONAL:
                known = ", ".join(NEEDED + OPTIONAL)
                self._complain(
                    number, places[i], f"there is no column '{shorten(name)}'; the columns are {known}"
                )
            elif name in columns[:i]:
                self._complain(number, places[i], f"the column {name} stands twice")
        missing = [name for name in NEEDED if name not in columns]
        if missing:
            self._complain(
                number, 1, f"the header lacks {' and '.join(missing)}; it starts {','.join(NEEDED)}"
            )

    def _take_reading(self, number: int, content: str, columns: list[str]) -> None:
        fields = [field.strip() for field in content.split(self._separator)]
        if len(fields) != len(columns):
            text = f"{len(fields)} fields, and the header has {len(columns)}"
            if self._separator == "," and len(fields) > len(columns):
                text += "; a decimal comma needs semicolons between the fields"
            self._complain(number, 1, text)
            return
        before = len(self._problems)
        places = _places(content, self._separator)
        found: dict[str, tuple[str, int]] = {}
        for name, field, place in zip(columns, fields, places, strict=True):
            if len(field) > 1 and field[0] == field[-1] == '"':
                field = field[1:-1].strip()
            found.setdefault(name, (field, place))

        def number_of(name: str, check: Callable[[float], str | None], *, ohms: bool = False) -> float | None:
            if name not in found:
                return None
            text, place = found[name]
            if text == "" and name in OPTIONAL:
                return None
            value = self._number(text, ohms)
            fault = f"is '{shorten(text)}', not a number" if value is None else check(value)
            if fault:
                self._complain(number, place, f"{name} {fault}")
            return value

        turn = number_of("turn", _turn_fault)
        ohm = number_of("ohm", _ohm_fault, ohms=True)
        celsius = number_of("celsius", _celsius_fault)
        sd_ohm = number_of("sd_ohm", _sd_fault, ohms=True)
        seconds = number_of("seconds", _seconds_fault)
        state = self._word(number, found, "state", STATES)
        event = self._word(number, found, "event", EVENTS)
        if len(self._problems) > before or turn is None or ohm is None or celsius is None:
            return
        reading = Reading(turn, ohm, celsius, sd_ohm, resting=state != "turning", seconds=seconds)
        self._lines.append(ReadingLine(number, reading, event))

    def _number(self, text: str, ohms: bool) -> float | None:
        if ohms and text.lower() in _INFINITE:
            return math.inf
        factor = 1.0
        if ohms and text[-1:] in ("k", "K"):
            text, factor = text[:-1].rstrip(), 1000.0
        pattern = _COMMA_NUMBER if self._separator == ";" else _NUMBER
        if not pattern.fullmatch(text) or len(text) > 60:
            return None
        value = float(text.replace(",", "."))
        return value * factor if math.isfinite(value) else None

    def _word(
        self, number: int, found: dict[str, tuple[str, int]], name: str, allowed: tuple[str, ...]
    ) -> str | None:
        text, place = found.get(name, ("", 0))
        word = " ".join(text.lower().split())
        if word == "":
            return None
        if word not in allowed:
            self._complain(number, place, f"{name} is '{shorten(text)}'; it can be {' or '.join(allowed)}")
            return None
        return word


def _places(content: str, separator: str) -> list[int]:
    """Column, from 1, at which each field's own text starts."""
    places, at = [], 0
    for field in content.split(separator):
        places.append(at + len(field) - len(field.lstrip()) + 1)
        at += len(field) + 1
    return places


def _turn_fault(turn: float) -> str | None:
    return None if 0 <= turn <= MOST_TURNS else f"is {turn:g}, outside 0 to {MOST_TURNS} turns"


def _ohm_fault(ohm: float) -> str | None:
    return None if ohm >= 0 else f"is {ohm:g} ohm, below 0 ohm"


def _celsius_fault(celsius: float) -> str | None:
    if COLDEST_C <= celsius <= WARMEST_C:
        return None
    return f"is {celsius:g} degrees C, outside {COLDEST_C:g} to {WARMEST_C:g} degrees C"


def _sd_fault(sd: float) -> str | None:
    return None if 0 < sd < math.inf else f"is {sd:g} ohm; a standard deviation is above 0 ohm and finite"


def _seconds_fault(_: float) -> str | None:
    return None
