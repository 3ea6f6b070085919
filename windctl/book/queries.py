"""Lists and look-ups, done in SQL: a shop's book holds thousands of coils, a screen shows forty."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, fields
from typing import Any, NamedTuple

import sqlalchemy as sa

from windctl.book.heads import SEAL, CoilHead
from windctl.book.query import EVERYTHING, Order, Query
from windctl.book.search import condition, order
from windctl.book.store import Store
from windctl.book.tables import coils, curve, entries
from windctl.errors import BookError, RecordBroken
from windctl.record.canonical import decode
from windctl.record.curve import CurvePoint
from windctl.record.entries import Entry
from windctl.record.events import CoilStarted

PAGE = 256  # rows of a record read at once; a reader holds up writers only that long
_NAMED = 6  # how many candidates an ambiguous name lists

_ID_PREFIX = re.compile(r"[0-9a-f][0-9a-f-]{3,35}")

HEAD_COLUMNS = tuple(coils.c[field.name] for field in fields(CoilHead))


@dataclass(frozen=True, slots=True)
class Which:
    """Which coils to list: those of a query, of these the ones with these values. `None` is "any"."""

    query: Query = EVERYTHING
    bench: str | None = None
    recipe: str | None = None
    batch: str | None = None
    outcome: str | None = None
    verdict: str | None = None
    sealed: bool | None = None
    spool: str | None = None

    def condition(self) -> sa.ColumnElement[bool]:
        """The same in SQL."""
        parts: list[sa.ColumnElement[bool]] = [
            coils.c[name] == value
            for name in ("bench", "recipe", "batch", "outcome", "verdict", "spool")
            if (value := getattr(self, name)) is not None
        ]
        if self.sealed is not None:
            parts.append(coils.c.trace_digest.is_not(None) if self.sealed else coils.c.trace_digest.is_(None))
        return sa.and_(condition(self.query), *parts)


@dataclass(frozen=True, slots=True)
class StoredRow:
    """One row of a record as the file has it, with the link that ties it to the rows before."""

    seq: int
    entry: Entry
    link: bytes


def head_of(row: sa.Row[Any, *tuple[Any, ...]]) -> CoilHead:
    """A coil's row; it begins with `HEAD_COLUMNS`."""
    return CoilHead(*row[: len(HEAD_COLUMNS)])


class CoilLine(NamedTuple):
    """What a list shows of one coil; the fields are those of `CoilHead`."""

    number: str
    id: str
    recipe: str
    started: str
    outcome: str
    turns: float | None
    dcr_20c_ohm: float | None
    dcr_u95_ohm: float | None
    verdict: str
    batch: str
    spool: str


LINE_COLUMNS = tuple(coils.c[name] for name in CoilLine._fields)


def listed(
    store: Store, which: Which, limit: int | None, offset: int, orders: Sequence[Order] = ()
) -> tuple[CoilHead, ...]:
    """Coils, sorted by `orders` and those of the query, else the one started last first."""
    query = _list(HEAD_COLUMNS, which, limit, offset, orders)
    with store.reading() as connection:
        return tuple([head_of(row) for row in connection.execute(query).all()])


def lines(
    store: Store, which: Which, limit: int | None, orders: Sequence[Order] = ()
) -> tuple[CoilLine, ...]:
    """The same, of each only what a list shows: for very many coils it takes a third of the time."""
    query = _list(LINE_COLUMNS, which, limit, 0, orders)
    with store.reading() as connection:
        return tuple(map(CoilLine._make, connection.execute(query).all()))


def _list(
    columns: Sequence[sa.Column[Any]],
    which: Which,
    limit: int | None,
    offset: int,
    orders: Sequence[Order],
) -> sa.Select[Any]:
    sorting = order((*orders, *which.query.orders))
    query = sa.select(*columns).where(which.condition()).order_by(*sorting)
    if limit is not None:  # the page is found in an index alone, and only its rows are read
        page = sa.select(coils.c.number).where(which.condition()).order_by(*sorting)
        numbers = page.limit(limit).offset(offset or None).subquery()
        query = sa.select(*columns).where(coils.c.number.in_(sa.select(numbers.c.number)))
        query = query.order_by(*sorting)
    elif offset:
        query = query.offset(offset)
    return query


def counted(store: Store, which: Which) -> int:
    """How many coils there are of these."""
    with store.reading() as connection:
        n = connection.scalar(sa.select(sa.func.count()).select_from(coils).where(which.condition()))
        return int(n or 0)


def found(store: Store, text: str) -> CoilHead:
    """The one coil of this number, of this serial number (the last digits), or whose id starts like this.

    Raises BookError when there is none, or more than one.
    """
    name = text.strip().lower()
    ways: list[sa.ColumnElement[bool]] = [coils.c.number == name]
    if re.fullmatch(r"[0-9]{1,6}", name):
        ways.append(coils.c.serial == int(name))
    if _ID_PREFIX.fullmatch(name):
        ways.append(sa.and_(coils.c.id >= name, coils.c.id < f"{name}~"))  # a range, which the key serves
    for way in ways:
        query = sa.select(*HEAD_COLUMNS).where(way).order_by(coils.c.started.desc(), coils.c.number.desc())
        with store.reading() as connection:
            heads = [head_of(row) for row in connection.execute(query.limit(_NAMED))]
        if len(heads) == 1:
            return heads[0]
        if heads:
            names = ", ".join(head.number for head in heads[: _NAMED - 1])
            more = ", ..." if len(heads) == _NAMED else ""
            raise BookError(f"{text!r} may mean several coils ({names}{more}): give the whole number")
    raise BookError(
        f"no coil {text!r} in the coil book {store.path}: give its number, the number's last digits, or "
        "at least the first four characters of its id; 'windctl coils list' shows them"
    )


def raw_rows(store: Store, coil_id: str, stop: int) -> Iterator[StoredRow]:
    """The rows of a coil's record below `stop`, in order; read in pages, each in a transaction of its own.

    Nothing is checked: in a spoilt file any value may be of any kind.
    """
    after = -1
    while True:
        query = (
            sa.select(entries)
            .where(entries.c.coil == coil_id, entries.c.seq > after, entries.c.seq < stop)
            .order_by(entries.c.seq)
            .limit(PAGE)
        )
        with store.reading() as connection:
            page = [
                StoredRow(row.seq, Entry(row.kind, row.payload, row.events), row.link)
                for row in connection.execute(query)
            ]
        yield from page
        if len(page) < PAGE:
            return
        after = page[-1].seq


def wrong_kind(row: StoredRow) -> str | None:
    """The name of a value that is of another kind than what was stored, if there is one."""
    entry = row.entry
    kinds = {"kind": (entry.kind, str), "events": (entry.events, int)}
    kinds |= {"payload": (entry.payload, bytes), "link": (row.link, bytes)}
    for name, (value, kind) in kinds.items():
        if not isinstance(value, kind):
            return name
    return None


def stored_rows(store: Store, coil_id: str, stop: int) -> Iterator[StoredRow]:
    """The same, for use.

    Raises RecordBroken for a row with a value of another kind than what was stored.
    """
    for row in raw_rows(store, coil_id, stop):
        if (name := wrong_kind(row)) is not None:
            raise RecordBroken(
                f"row {row.seq} of the record of coil {coil_id} in {store.path} was altered: "
                f"its {name} is of the wrong kind; 'windctl coils verify' says more"
            )
        yield row


def record_entries(store: Store, head: CoilHead) -> Iterator[Entry]:
    """The entries that hold a coil's events, in order; the seal is none of them."""
    for row in stored_rows(store, head.id, head.n_entries):
        if row.entry.kind != SEAL:
            yield row.entry


def starts_of(store: Store, ids: Sequence[str]) -> Iterator[tuple[str, CoilStarted]]:
    """The first facts of many coils, each with the coil's id, in any order. Raises RecordBroken for one that
    is none."""
    for at in range(0, len(ids), PAGE):
        query = sa.select(entries.c.coil, entries.c.kind, entries.c.payload)
        some = query.where(entries.c.coil.in_(ids[at : at + PAGE]), entries.c.seq == 0)
        with store.reading() as connection:
            rows = connection.execute(some).all()
        for coil, kind, payload in rows:
            started = decode(kind, payload)
            if not isinstance(started, CoilStarted):
                raise RecordBroken(f"the record of coil {coil} does not begin with the start of the coil")
            yield coil, started


def curve_in(connection: sa.Connection, coil_id: str) -> list[tuple[int, CurvePoint]]:
    """The points of a coil's curve with their places in it, in order."""
    query = sa.select(curve).where(curve.c.coil == coil_id).order_by(curve.c.seq)
    return [
        (row.seq, CurvePoint(row.turn, row.ohm_20c, row.final_ohm, row.final_sd))
        for row in connection.execute(query)
    ]
