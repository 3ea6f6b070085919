"""The way from schema 3 to 4: a table of what closed coils teach, and why pairs were parted in the words of
their coils.

Both are taken from the records and the logs. The names of tables and columns stand here as they were then: a
later version's tables may differ.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import astuple

import sqlalchemy as sa

from windctl.book.lessons import IN_RECORD as OF_LESSON
from windctl.book.lessons import row_of
from windctl.book.words import IN_RECORD as WRITTEN
from windctl.book.words import said_in, words_of, written_in
from windctl.errors import RecordBroken
from windctl.record.addenda import Addendum, CoilImported, PairParted, decode
from windctl.record.entries import Entry

_TABLE = """
CREATE TABLE lessons (
    coil TEXT NOT NULL,
    began DOUBLE NOT NULL,
    teaches INTEGER NOT NULL,
    how TEXT NOT NULL,
    simulated INTEGER NOT NULL,
    bench TEXT NOT NULL,
    spool TEXT NOT NULL,
    bobbin TEXT NOT NULL,
    lay TEXT NOT NULL,
    style TEXT NOT NULL,
    PRIMARY KEY (coil),
    FOREIGN KEY(coil) REFERENCES coils (id)
) WITHOUT ROWID
"""
_INDEXES = (
    "CREATE INDEX lessons_by_time ON lessons (simulated, teaches, began)",
    "CREATE INDEX lessons_by_spool ON lessons (spool)",
    "CREATE INDEX lessons_by_lay ON lessons (lay, simulated, teaches, began)",
    "CREATE INDEX lessons_by_bobbin ON lessons (bobbin, simulated, teaches, began)",
)
_INSERT = "INSERT INTO lessons VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?)"


def add_lessons(connection: sa.Connection) -> None:
    """Make the table, fill it, index it; write the words of parted coils anew."""
    connection.exec_driver_sql(_TABLE)
    silent: dict[str, bool] = {}
    for fact in _said(connection, "imports"):
        if isinstance(fact, CoilImported):
            silent[fact.coil] = not fact.teaches
    query = "SELECT id, started, bench, recipe, number FROM coils WHERE trace_digest IS NOT NULL"
    for coil, started, bench, recipe, number in connection.exec_driver_sql(query).fetchall():
        said = list(_said(connection, f"coil {coil}"))
        record = _record(connection, coil, OF_LESSON, first=True)
        row = row_of(started, bench, record, said, silent=silent.get(coil, False))
        connection.exec_driver_sql(_INSERT, (coil, *astuple(row)))
        if any(isinstance(fact, PairParted) for fact in said):
            texts = (*written_in(_record(connection, coil, WRITTEN)), *said_in(said))
            change = "UPDATE coils SET words = ? WHERE id = ?"
            connection.exec_driver_sql(change, (words_of(str(recipe), str(number), texts), coil))
    for statement in _INDEXES:
        connection.exec_driver_sql(statement)


def _said(connection: sa.Connection, log: str) -> Iterator[Addendum]:
    """What can be read of a log."""
    query = "SELECT kind, payload FROM log_entries WHERE log = ? ORDER BY seq"
    for kind, payload in connection.exec_driver_sql(query, (log,)).fetchall():
        try:
            yield decode(kind, payload)
        except (RecordBroken, TypeError):
            continue


def _record(
    connection: sa.Connection, coil: str, kinds: tuple[str, ...], *, first: bool = False
) -> Iterator[Entry]:
    """Rows of a record of these kinds, and its first one where that is wanted; read when asked for."""
    marks = ", ".join("?" * len(kinds))
    query = (
        f"SELECT kind, payload FROM entries WHERE coil = ? AND (kind IN ({marks}) OR seq = ?) ORDER BY seq"
    )
    rows = connection.exec_driver_sql(query, (coil, *kinds, 0 if first else -1)).fetchall()
    yield from (Entry(kind, payload, 1) for kind, payload in rows if isinstance(payload, bytes))
