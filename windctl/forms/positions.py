"""Where every key and value of a TOML document stands.

The standard parser keeps no positions. This scanner walks a document that the parser has already accepted, so
it need not validate: it only finds where keys, values and brackets begin, and what path each belongs to.
"""

from __future__ import annotations

import re
import tomllib
from bisect import bisect_right
from collections.abc import Mapping
from dataclasses import dataclass

from windctl.forms.faults import KeyPath


@dataclass(frozen=True, slots=True, order=True)
class Spot:
    """Line and column, both from 1; columns count characters."""

    line: int
    column: int


@dataclass(frozen=True, slots=True)
class Place:
    """Where a key is named and where its value begins. A table under a header begins at its name there, an
    element of an array has no name and is both."""

    key: Spot
    value: Spot


_BLANK = re.compile(r"(?:[ \t\r\n]|#[^\n]*)*")
_SPACE = re.compile(r"[ \t]*")
_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_BASIC = re.compile(r'"(?:\\.|[^"\\])*"')
_LITERAL = re.compile(r"'[^']*'")
_BASIC_LINES = re.compile(r'"""(?:\\.|[^"\\]|"(?!""))*"""(?:"{0,2})', re.DOTALL)
_LITERAL_LINES = re.compile(r"'''(?:[^']|'(?!''))*'''(?:'{0,2})")
# A date and a time of day may be parted by one space; every other plain value ends at a space.
_PLAIN = re.compile(r"\d{4}-\d\d-\d\d \d\d:[^\s,\]}#]+|[^\s,\]}#]+")

_STRINGS = (_BASIC_LINES, _LITERAL_LINES, _BASIC, _LITERAL)


def find_positions(text: str) -> Mapping[KeyPath, Place]:
    """Every key path of a valid TOML document, with its place. Elements of arrays count from 0 in the path.

    A table made by several headers stands where its own header is, else where it is first implied.
    The result for a text that is not valid TOML is undefined: ValueError, or places of no meaning.
    """
    scanner = _Scanner(text)
    scanner.document()
    return scanner.places


class _Scanner:
    """One pass over a document. `at` is the next character; methods move it past what they are named for."""

    def __init__(self, text: str) -> None:
        self.text = text
        self.at = 0
        self.places: dict[KeyPath, Place] = {}
        self._line_starts = [0, *(match.end() for match in re.finditer("\n", text))]
        self._table_counts: dict[KeyPath, int] = {}  # arrays of tables: how many headers so far

    def document(self) -> None:
        table: KeyPath = ()
        while self._skip(_BLANK) < len(self.text):
            if self._take("[["):
                table = self._header(array=True)
            elif self._take("["):
                table = self._header(array=False)
            else:
                self._pair(table)

    def _header(self, *, array: bool) -> KeyPath:
        parts = self._key()
        self._expect("]]" if array else "]")
        path: KeyPath = ()
        for part, spot in parts[:-1]:
            path = (*path, part)
            self.places.setdefault(path, Place(spot, spot))
            if path in self._table_counts:
                path = (*path, self._table_counts[path] - 1)
        name, spot = parts[-1]
        path = (*path, name)
        if not array:
            self.places[path] = Place(spot, spot)
            return path
        self.places.setdefault(path, Place(spot, spot))
        index = self._table_counts.get(path, 0)
        self._table_counts[path] = index + 1
        path = (*path, index)
        self.places[path] = Place(spot, spot)
        return path

    def _pair(self, table: KeyPath) -> None:
        parts = self._key()
        self._expect("=")
        self._skip(_SPACE)
        path = table
        for part, spot in parts[:-1]:
            path = (*path, part)
            self.places.setdefault(path, Place(spot, spot))
        name, spot = parts[-1]
        path = (*path, name)
        self.places[path] = Place(spot, self._spot(self.at))
        self._value(path)

    def _key(self) -> list[tuple[str, Spot]]:
        parts: list[tuple[str, Spot]] = []
        while True:
            self._skip(_SPACE)
            spot = self._spot(self.at)
            parts.append((self._key_part(), spot))
            self._skip(_SPACE)
            if not self._take("."):
                return parts

    def _key_part(self) -> str:
        if match := _BASIC.match(self.text, self.at):
            self.at = match.end()
            return str(tomllib.loads(f"key = {match.group()}")["key"])  # the parser knows the escapes
        if match := _LITERAL.match(self.text, self.at):
            self.at = match.end()
            return match.group()[1:-1]
        match = _BARE_KEY.match(self.text, self.at)
        if match is None:
            raise ValueError(f"no key at character {self.at}")
        self.at = match.end()
        return match.group()

    def _value(self, path: KeyPath) -> None:
        if self._take("["):
            self._elements(path)
        elif self._take("{"):
            self._inline_table(path)
        else:
            for pattern in (*_STRINGS, _PLAIN):
                if match := pattern.match(self.text, self.at):
                    self.at = match.end()
                    return
            raise ValueError(f"no value at character {self.at}")

    def _elements(self, path: KeyPath) -> None:
        index = 0
        while True:
            self._skip(_BLANK)
            if self._take("]"):
                return
            spot = self._spot(self.at)
            self.places[(*path, index)] = Place(spot, spot)
            self._value((*path, index))
            index += 1
            self._skip(_BLANK)
            self._take(",")

    def _inline_table(self, path: KeyPath) -> None:
        while True:
            self._skip(_BLANK)
            if self._take("}"):
                return
            self._pair(path)
            self._skip(_BLANK)
            self._take(",")

    def _skip(self, pattern: re.Pattern[str]) -> int:
        match = pattern.match(self.text, self.at)
        if match is not None:
            self.at = match.end()
        return self.at

    def _take(self, token: str) -> bool:
        if self.text.startswith(token, self.at):
            self.at += len(token)
            return True
        return False

    def _expect(self, token: str) -> None:
        if not self._take(token):
            raise ValueError(f"no {token} at character {self.at}")

    def _spot(self, at: int) -> Spot:
        line = bisect_right(self._line_starts, at)
        return Spot(line, at - self._line_starts[line - 1] + 1)
