"""A query in SQL: the one place where what was asked for meets the tables."""

from __future__ import annotations

from collections.abc import Sequence

import sqlalchemy as sa

from windctl.book.query import FREE, Name, Order, Part, Period, Query, Span, Term, Wanted
from windctl.book.tables import coils
from windctl.book.words import fold

# The column of each field of numbers, names and choices.
_COLUMNS: dict[str, sa.ColumnElement[object]] = {
    "coil": coils.c.number,
    "recipe": coils.c.recipe,
    "batch": coils.c.batch,
    "spool": coils.c.spool,
    "bench": coils.c.bench,
    "by": coils.c.operator,
    "id": coils.c.id,
    "started": coils.c.started,
    "outcome": coils.c.outcome,
    "verdict": coils.c.verdict,
    "turns": coils.c.turns,
    "ohm": coils.c.dcr_20c_ohm,
}

# How a field sorts, where not by its column as it is. Capitals make no difference.
_SORTED: dict[str, tuple[sa.ColumnElement[object], ...]] = {
    "coil": (coils.c.bench, coils.c.year, coils.c.serial),
    **{name: (sa.func.lower(_COLUMNS[name]),) for name in ("recipe", "batch", "spool", "by")},
}

_MAY_LACK = ("turns", "ohm")  # an open coil has none

LATEST_FIRST = (coils.c.started.desc(), coils.c.number.desc())


def condition(query: Query) -> sa.ColumnElement[bool]:
    """What a coil's row must fulfil."""
    return sa.and_(sa.true(), *(_term(term) for term in query.terms))


def order(orders: Sequence[Order]) -> tuple[sa.ColumnElement[object], ...]:
    """How rows are sorted: what is not known comes last, and of equals the one started last first."""
    columns: list[sa.ColumnElement[object]] = []
    for one in orders:
        for column in _SORTED.get(one.field, (_COLUMNS[one.field],)):
            sorted_column = column.desc() if one.descending else column.asc()
            columns.append(sorted_column.nulls_last() if one.field in _MAY_LACK else sorted_column)
    alone = any(one.field == "coil" for one in orders)  # no two coils have the same number
    return tuple(columns) if alone else (*columns, *LATEST_FIRST)


def _term(term: Term) -> sa.ColumnElement[bool]:
    holds = sa.or_(*(_holds(term.field, wanted) for wanted in term.wanted))
    if not term.negated:
        return holds
    # What is not known is not within any range, so it is there when the range is excluded.
    return sa.not_(sa.func.coalesce(holds, sa.false()) if term.field in _MAY_LACK else holds)


def _holds(field: str, wanted: Wanted) -> sa.ColumnElement[bool]:
    match wanted:
        case Part(text):
            return _within(field, text)
        case Name((whole,)) if field == "coil":
            return coils.c.number == whole.lower()  # numbers have no capitals: the key finds it
        case Name(parts):
            return _like(field, "%".join(_literal(part) for part in parts))
        case Span(low, high, included):
            return _between(field, low, high, included)
        case Period(low, high):
            return _between(field, low, high, False)


def _within(field: str, text: str) -> sa.ColumnElement[bool]:
    words, number, sought = coils.c.words, coils.c.number, fold(text)
    first = sa.func.instr(words, sought)
    end_of_recipe = sa.func.instr(words, "\n")
    match field:
        case "recipe":
            return sa.and_(first > 0, first < end_of_recipe)
        case "note":
            notes = sa.func.substr(words, end_of_recipe + sa.func.length(number) + 2)
            return sa.and_(first > 0, sa.func.instr(notes, sought) > 0)
        case "id":  # its beginning, as a range that the key serves
            begin = text.strip().lower()
            return sa.and_(coils.c.id >= begin, coils.c.id < f"{begin}~")
        case f if f == FREE:
            return first > 0
    return _like(field, f"%{_literal(text)}%")


def _like(field: str, pattern: str) -> sa.ColumnElement[bool]:
    """SQLite's LIKE makes no difference of a to A; PostgreSQL has ILIKE for that, which is slower here."""
    return _COLUMNS[field].like(pattern, escape="/")


def _between(
    field: str, low: float | str | None, high: float | str | None, included: bool
) -> sa.ColumnElement[bool]:
    column = _COLUMNS[field]
    ends: list[sa.ColumnElement[bool]] = []
    if low is not None:
        ends.append(column >= low)
    if high is not None:
        ends.append(column <= high if included else column < high)
    return sa.and_(*ends)


def _literal(text: str) -> str:
    """The text with nothing in it that LIKE takes for more than itself."""
    return text.replace("/", "//").replace("%", "/%").replace("_", "/_")
