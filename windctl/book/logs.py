"""Logs: what is said later about a sealed coil, and what is known of a spool.

Each is a chain like a coil's record, and every log's beginning stands in the log of logs, so that one that
vanished is missed.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass

import sqlalchemy as sa

from windctl.book.store import Store
from windctl.book.tables import log_entries, logs
from windctl.errors import BookError, RecordBroken
from windctl.record.addenda import Addendum, LogBegun, decode, encode, genesis
from windctl.record.chain import link

LOGS = "logs"  # the log of logs
COIL, SPOOL = "coil ", "spool "
IMPORTS = "imports"  # which coils came from other books, and which numbers were passed over for them


@dataclass(frozen=True, slots=True)
class LogRow:
    """One row of a log, as stored: in a spoilt file any value may be of any kind."""

    seq: int
    kind: str
    payload: bytes
    link: bytes


@dataclass(frozen=True, slots=True)
class Log:
    """A log's name, how many rows it says it has, its last link (hex), and the rows."""

    name: str
    n: int
    digest: str
    rows: tuple[LogRow, ...]


def append(connection: sa.Connection, name: str, facts: Sequence[Addendum]) -> None:
    """Add facts to the end of a log, which begins with the first. In a transaction that writes.

    Raises BookError for a fact that cannot be kept as it is.
    """
    append_stored(connection, name, [(fact.kind, _payload(fact)) for fact in facts])


def append_stored(connection: sa.Connection, name: str, facts: Sequence[tuple[str, bytes]]) -> None:
    """The same with facts as they are stored: kind and payload."""
    tail = connection.execute(sa.select(logs.c.n, logs.c.digest).where(logs.c.name == name)).one_or_none()
    if tail is None:
        if name != LOGS:
            append(connection, LOGS, (LogBegun(name),))
        connection.execute(sa.insert(logs), [{"name": name, "n": 0, "digest": genesis(name).hex()}])
        n, last = 0, genesis(name)
    else:
        n, last = int(tail.n), bytes.fromhex(tail.digest)
    values = []
    for kind, payload in facts:
        last = link(last, kind, payload)
        values.append({"log": name, "seq": n, "kind": kind, "payload": payload, "link": last})
        n += 1
    connection.execute(sa.insert(log_entries), values)
    connection.execute(sa.update(logs).where(logs.c.name == name).values(n=n, digest=last.hex()))


def _payload(fact: Addendum) -> bytes:
    try:
        return encode(fact)
    except ValueError as error:
        raise BookError(f"this cannot be kept in the coil book: {error}") from error


def read(connection: sa.Connection, name: str) -> Log | None:
    """One log; None where nothing was ever said."""
    head = connection.execute(sa.select(logs).where(logs.c.name == name)).one_or_none()
    if head is None:
        return None
    return Log(head.name, head.n, head.digest, tuple(_rows(connection, log_entries.c.log == name)))


def _rows(connection: sa.Connection, which: sa.ColumnElement[bool]) -> Iterator[LogRow]:
    query = sa.select(log_entries).where(which).order_by(log_entries.c.seq)
    for row in connection.execute(query):
        yield LogRow(row.seq, row.kind, row.payload, row.link)


def facts_of(log: Log | None) -> tuple[Addendum, ...]:
    """What a log says. Raises RecordBroken where a row cannot be read."""
    return () if log is None else tuple(_fact(log.name, row.kind, row.payload) for row in log.rows)


def decoded(log: Log | None) -> list[Addendum]:
    """What can be read of a log; the rest is told by its check."""
    facts: list[Addendum] = []
    for row in () if log is None else log.rows:
        try:
            facts.append(decode(row.kind, row.payload))
        except (RecordBroken, TypeError):
            continue
    return facts


def all_facts(store: Store, prefix: str) -> dict[str, list[Addendum]]:
    """The facts of all logs whose names begin so, by what comes after it; in order within each."""
    with store.reading() as connection:
        return facts_by_log(connection, prefix)


def facts_by_log(
    connection: sa.Connection, prefix: str, which: Sequence[str] | None = None
) -> dict[str, list[Addendum]]:
    """The same; `which`: only of those that go on so. Raises RecordBroken where a row cannot be read."""
    facts: dict[str, list[Addendum]] = {}
    query = sa.select(log_entries.c.log, log_entries.c.kind, log_entries.c.payload)
    if which is None:
        query = query.where(log_entries.c.log.startswith(prefix, autoescape=True))
    else:
        query = query.where(log_entries.c.log.in_([prefix + one for one in which]))
    for name, kind, payload in connection.execute(query.order_by(log_entries.c.log, log_entries.c.seq)):
        facts.setdefault(name.removeprefix(prefix), []).append(_fact(name, kind, payload))
    return facts


def _fact(log: str, kind: str, payload: bytes) -> Addendum:
    try:
        return decode(kind, payload)
    except (RecordBroken, TypeError) as error:
        raise RecordBroken(f"the log {log!r}: {error}; 'windctl coils verify' says more") from error


@dataclass(frozen=True, slots=True)
class LogFault:
    """One thing in a log that does not agree. `seq`: the row, None where it is none of them."""

    log: str
    seq: int | None
    what: str


def check_log(log: Log) -> Iterator[LogFault]:
    """A log against its own links. A row that disagrees with its link is told, and the next is tried both
    ways, so that one change is one fault."""
    if not (isinstance(log.name, str) and isinstance(log.n, int) and isinstance(log.digest, str)):
        yield LogFault(str(log.name), None, "its row among the logs was altered")
        return
    lasts: tuple[bytes, ...] = (genesis(log.name),)
    for at, row in enumerate(log.rows):
        good = (
            row.seq == at
            and isinstance(row.kind, str)
            and isinstance(row.payload, bytes)
            and isinstance(row.link, bytes)
        )
        ties = tuple(link(last, row.kind, row.payload) for last in lasts) if good else ()
        if not good or row.link not in ties:
            yield LogFault(log.name, row.seq, "was altered: it does not agree with its link")
        lasts = (*ties, row.link) if good else tuple(link for link in (row.link,) if isinstance(link, bytes))
        if good:
            try:
                decode(row.kind, row.payload)
            except RecordBroken as error:
                yield LogFault(log.name, row.seq, str(error))
    if log.n != len(log.rows):
        yield LogFault(log.name, None, f"it has {len(log.rows)} rows, and says it has {log.n!r}")
    if log.digest not in [last.hex() for last in lasts]:
        yield LogFault(log.name, None, f"it ends with another digest than it says, {log.digest!r}")


def check_logs(store: Store, coil_ids: Iterable[str]) -> Iterator[LogFault]:
    """All logs, that none is missing, and that those of coils belong to coils in the book."""
    with store.reading() as connection:
        there = list(connection.scalars(sa.select(logs.c.name).order_by(logs.c.name)))
        owned = sa.select(logs.c.name)
        lost = list(connection.scalars(sa.select(log_entries.c.log).where(log_entries.c.log.not_in(owned))))
    for name in dict.fromkeys(lost):
        yield LogFault(str(name), None, "its rows are here, and it is not among the logs")
    begun: set[str] = set()
    for name in there:
        log = None
        with store.reading() as connection:
            log = read(connection, name)
        if log is None:
            continue
        yield from check_log(log)
        if name == LOGS:
            begun = set(_begun(log))
    for name in sorted(begun - set(there)):
        yield LogFault(name, None, "it was begun, and is not in the book")
    known = {f"{COIL}{coil}" for coil in coil_ids}
    for name in there:
        if name != LOGS and name not in begun:
            yield LogFault(str(name), None, "the log of logs does not know it")
        if isinstance(name, str) and name.startswith(COIL) and name not in known:
            yield LogFault(name, None, "its coil is not in the book")


def _begun(log: Log) -> Iterator[str]:
    for row in log.rows:
        try:
            fact = decode(row.kind, row.payload)
        except (RecordBroken, TypeError):
            continue  # told already
        if isinstance(fact, LogBegun):
            yield fact.log
