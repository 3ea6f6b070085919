"""The language in which coils are looked for. Pure: a text becomes a query, or is told where it goes wrong.

    recipe:neck verdict:within since:2026-01 spool:s1,s2 turns:7000..8000 not note:splice "by hand" sort:-ohm

Terms stand beside each other and must all hold. A term is a word or a "quoted text", looked for in recipe,
number and notes, or `field:value`; several values with commas between are alternatives; `not` before a term
turns it round. Capitals make no difference. Fields are of five kinds:

- names (coil, batch, spool, bench): the whole name, in which `*` stands for anything
- texts (recipe, note, by): anywhere within; id: its beginning
- choices (outcome, verdict)
- numbers (turns, ohm at 20 degrees C): `7000..8000`, `7000..`, `..8000`, both ends included, `k` thousand;
  a number alone means what rounds to it as it is written
- times (started): a year, month, day or minute such as 2026-03-01, or from one to another with `..`; since
  and until are the same with one end open

`sort:` takes fields, `-` before one for the largest first.
"""

from __future__ import annotations

import difflib
import re
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from datetime import datetime, timedelta

from windctl.errors import QueryError


@dataclass(frozen=True, slots=True)
class Name:
    """A whole name; between its parts anything may stand."""

    parts: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Part:
    """A text that is to be found within another."""

    text: str


@dataclass(frozen=True, slots=True)
class Span:
    """From `low`, included, to `high`; None: no limit."""

    low: float | None
    high: float | None
    high_included: bool


@dataclass(frozen=True, slots=True)
class Period:
    """Texts of time from `low`, included, up to `high`, not included; None: no limit."""

    low: str | None
    high: str | None


Wanted = Name | Part | Span | Period


@dataclass(frozen=True, slots=True)
class Term:
    """One of `wanted` holds of `field`, or with `negated` none. No field: recipe, number and notes."""

    field: str
    wanted: tuple[Wanted, ...]
    negated: bool = False


@dataclass(frozen=True, slots=True)
class Order:
    """Sorted by a field."""

    field: str
    descending: bool


@dataclass(frozen=True, slots=True)
class Query:
    """All terms hold; sorted by the first order, within it by the next."""

    terms: tuple[Term, ...] = ()
    orders: tuple[Order, ...] = ()


EVERYTHING = Query()

CHOICES: Mapping[str, tuple[str, ...]] = {
    "outcome": ("open", "finished", "stopped", "tripped"),
    "verdict": ("within", "outside", "not judged"),
}
SORTED_BY = (
    "started",
    "coil",
    "recipe",
    "batch",
    "spool",
    "bench",
    "by",
    "outcome",
    "verdict",
    "turns",
    "ohm",
)
FREE = ""  # the field of a term without one

_NUMBER = re.compile(r"(\d+)(?:\.(\d*))?(k?)", re.ASCII)
_TIME = re.compile(r"(\d{4})(?:-(\d{2})(?:-(\d{2})(?:T(\d{2}):(\d{2}))?)?)?", re.ASCII)
_ENDS = frozenset('",')  # where a value without quotes ends, besides blanks


@dataclass(frozen=True, slots=True)
class _Value:
    """A value as it stands in the text, from `at` on."""

    text: str
    quoted: bool
    at: int


def parse(text: str) -> Query:
    """The query that `text` says; an empty text asks for everything. Raises QueryError."""
    try:
        return _parse(text)
    except QueryError as error:
        raise QueryError(error.what, error.at, text) from None


def _parse(text: str) -> Query:
    terms: list[Term] = []
    orders: list[Order] = []
    scan = _Scan(text)
    negated_at: int | None = None
    while (at := scan.next_term()) is not None:
        if text[at] == '"':
            term = Term(FREE, (Part(_some(scan.quoted(), at)),))
        else:
            word = scan.word()
            if word == "not" and scan.at_end_of_term() and negated_at is None:
                negated_at = at
                continue
            if not scan.colon():
                term = Term(FREE, (Part(word),))
            elif word.lower() == "sort":
                if negated_at is not None:
                    raise QueryError("'not' belongs before a condition, not before sort", negated_at)
                orders += [_order(value) for value in scan.values("sort")]
                continue
            else:
                field = _field(word, at)
                term = Term(
                    _COLUMN.get(field, field), tuple(_KINDS[field](field, v) for v in scan.values(field))
                )
        terms.append(Term(term.field, term.wanted, negated_at is not None))
        negated_at = None
    if negated_at is not None:
        raise QueryError(
            "after 'not' a condition is missing; to look for the word, write it in quotes", negated_at
        )
    return Query(tuple(terms), tuple(orders))


def sorted_by(text: str) -> tuple[Order, ...]:
    """The orders that `text`, fields with commas between, names. Raises QueryError."""
    text = text.strip()
    if not text:
        return ()
    scan = _Scan(text)
    try:
        orders = tuple(_order(value) for value in scan.values("sort"))
    except QueryError as error:
        raise QueryError(error.what, error.at, text) from None
    if (at := scan.next_term()) is not None:
        raise QueryError("fields to sort by have commas between them, and no blanks", at, text)
    return orders


class _Scan:
    """A text and a place in it."""

    def __init__(self, text: str) -> None:
        self._text = text
        self._at = 0

    def next_term(self) -> int | None:
        """Where the next term begins; None at the end."""
        while not self._done() and self._text[self._at].isspace():
            self._at += 1
        return None if self._done() else self._at

    def _done(self) -> bool:
        return self._at >= len(self._text)

    def at_end_of_term(self) -> bool:
        """A blank comes, or nothing more."""
        return self._done() or self._text[self._at].isspace()

    def word(self) -> str:
        """Up to a colon or a blank."""
        begin = self._at
        while not self.at_end_of_term() and self._text[self._at] != ":":
            if self._text[self._at] == '"':
                raise QueryError("a quote begins within a word: leave a blank before it", self._at)
            self._at += 1
        return self._text[begin : self._at]

    def colon(self) -> bool:
        """Pass over a colon, if one comes."""
        there = not self._done() and self._text[self._at] == ":"
        self._at += there
        return there

    def quoted(self) -> str:
        """What stands in quotes; a quote within is written twice."""
        begin = self._at
        parts: list[str] = []
        while True:
            end = self._text.find('"', self._at + 1)
            if end < 0:
                raise QueryError("this quote is not closed", begin)
            parts.append(self._text[self._at + 1 : end])
            self._at = end + 1
            if self._done() or self._text[self._at] != '"':
                return '"'.join(parts)

    def values(self, field: str) -> Iterator[_Value]:
        """The values behind a field's colon."""
        while True:
            at = self._at
            if not self._done() and self._text[at] == '"':
                yield _Value(self.quoted(), True, at)
            else:
                while not self.at_end_of_term() and self._text[self._at] not in _ENDS:
                    self._at += 1
                if self._at == at:
                    raise QueryError(f"{field}: wants {_wants(field)}, without a blank before it", at)
                yield _Value(self._text[at : self._at], False, at)
            if self.at_end_of_term():
                return
            if self._text[self._at] != ",":
                raise QueryError("a value ends here: a comma or a blank is missing", self._at)
            self._at += 1


def _some(text: str, at: int) -> str:
    if not text.strip():
        raise QueryError("there is nothing in these quotes to look for", at)
    return text


def _field(word: str, at: int) -> str:
    name = word.lower()
    if name in _KINDS:
        return name
    if not name:
        raise QueryError("before the colon a field is missing", at)
    near = difflib.get_close_matches(name, _KINDS, 1)
    meant = f"did you mean {near[0]}? " if near else ""
    raise QueryError(
        f"there is no field {word!r}: {meant}fields are {', '.join(_KINDS)} and sort; "
        "a text with a colon is looked for in quotes",
        at,
    )


def _order(value: _Value) -> Order:
    descending = value.text.startswith("-")
    field = value.text.removeprefix("-").lower()
    if field not in SORTED_BY:
        raise QueryError(f"cannot sort by {field!r}: sort wants {_wants('sort')}", value.at + descending)
    return Order(field, descending)


def _name(_field: str, value: _Value) -> Wanted:
    return Name((value.text,) if value.quoted else tuple(value.text.split("*")))


def _part(field: str, value: _Value) -> Wanted:
    if not value.text.strip():
        raise QueryError(f"{field}: wants {_wants(field)}", value.at)
    return Part(value.text)


def _choice(field: str, value: _Value) -> Wanted:
    said = value.text.lower().replace("-", " ").replace("_", " ")
    if said not in CHOICES[field]:
        raise QueryError(f"{field} is never {value.text!r}: it is {_wants(field)}", value.at)
    return Name((said,))


def _span(field: str, value: _Value) -> Wanted:
    low, dots, high = value.text.partition("..")
    if not dots:
        number, half = _number(field, value, low)
        return Span(number - half, number + half, False)
    if not low and not high:
        raise QueryError(f"{field}: wants {_wants(field)}", value.at)
    least = _number(field, value, low)[0] if low else None
    most = _number(field, value, high)[0] if high else None
    if least is not None and most is not None and least > most:
        raise QueryError(
            f"{field}: {low} is more than {high}, so nothing lies between: the lower first", value.at
        )
    return Span(least, most, True)


def _number(field: str, value: _Value, text: str) -> tuple[float, float]:
    """A number, and half of its last place."""
    match = _NUMBER.fullmatch(text.lower())
    if match is None or len(text) > 30:
        raise QueryError(f"{field}: {text!r} is no number: it wants {_wants(field)}", value.at)
    whole, decimals, kilo = match[1], match[2] or "", match[3]
    thousand = 1000.0 if kilo else 1.0
    return float(f"{whole}.{decimals or 0}") * thousand, 0.5 * thousand * 10.0 ** -len(decimals)


def _period(field: str, value: _Value) -> Wanted:
    low, dots, high = value.text.partition("..")
    if not dots:
        return Period(*_times(field, value, low))
    if not low and not high:
        raise QueryError(f"{field}: wants {_wants(field)}", value.at)
    begin = _times(field, value, low)[0] if low else None
    end = _times(field, value, high)[1] if high else None
    if begin is not None and end is not None and begin >= end:
        raise QueryError(f"{field}: {low} comes after {high}: the earlier first", value.at)
    return Period(begin, end)


def _since(field: str, value: _Value) -> Wanted:
    return Period(_times(field, value, value.text)[0], None)


def _until(field: str, value: _Value) -> Wanted:
    return Period(None, _times(field, value, value.text)[1])


def _times(field: str, value: _Value, text: str) -> tuple[str, str]:
    """Where a year, month, day or minute begins and where the next one does: texts that sort as times do."""
    match = _TIME.fullmatch(text.upper())
    if match is None:
        raise QueryError(f"{field}: {text!r} is no time: it wants {_wants(field)}", value.at)
    year, month, day, hour, minute = (None if part is None else int(part) for part in match.groups())
    year = year or 0
    if not 1900 <= year <= 9998:
        raise QueryError(f"{field}: the year {year} is outside 1900 to 9998", value.at)
    try:
        begin = datetime(year, month or 1, day or 1, hour or 0, minute or 0)
    except ValueError as error:
        raise QueryError(f"{field}: there is no {text}: {error}", value.at) from None
    if minute is not None:
        return begin.isoformat()[:16], (begin + timedelta(minutes=1)).isoformat()[:16]
    if day is not None:
        return begin.isoformat()[:10], (begin + timedelta(days=1)).isoformat()[:10]
    if month is not None:
        return begin.isoformat()[:7], (begin.replace(day=28) + timedelta(days=4)).isoformat()[:7]
    return f"{year}", f"{year + 1}"


def _wants(field: str) -> str:
    if field == "sort":
        return f"one of {', '.join(SORTED_BY)}, with - before it for the largest first"
    if field in CHOICES:
        *some, last = (f'"{choice}"' if " " in choice else choice for choice in CHOICES[field])
        return f"{', '.join(some)} or {last}"
    return _WANTS[_KINDS[field]]


_KINDS: Mapping[str, Callable[[str, _Value], Wanted]] = {
    "recipe": _part,
    "coil": _name,
    "batch": _name,
    "spool": _name,
    "started": _period,
    "since": _since,
    "until": _until,
    "outcome": _choice,
    "verdict": _choice,
    "turns": _span,
    "ohm": _span,
    "note": _part,
    "by": _part,
    "bench": _name,
    "id": _part,
}
_COLUMN = {"since": "started", "until": "started"}
_WANTS: Mapping[Callable[[str, _Value], Wanted], str] = {
    _part: "a text",
    _name: "a name, in which * stands for anything",
    _span: "a number such as 7500 or 3.64k, or a range such as 7000..8000, 7000.. or ..8000",
    _period: "a time such as 2026, 2026-03 or 2026-03-01, or a range such as 2026-01..2026-03",
    _since: "a time such as 2026, 2026-03 or 2026-03-01",
    _until: "a time such as 2026, 2026-03 or 2026-03-01",
}
FIELDS = tuple(_KINDS)
