"""One book file: its connections and transactions.

Rollback journal with synchronous=EXTRA: after COMMIT returns, the journal's removal is on the disk too, so a
pulled plug cannot bring back the state before. The write-ahead log is not used: SQLite up to 3.51.2 can
damage a file in that mode when two connections write, and such versions are everywhere.

Transactions are begun here and nowhere else. Writers use BEGIN IMMEDIATE: they queue for the lock before
they read, so what they read is what they change, and none fails half way because another was quicker. Readers
keep their transactions short, because a reader holds up a writer's commit.
"""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import closing, contextmanager
from functools import partial
from pathlib import Path
from typing import cast

import sqlalchemy as sa

from windctl.book.faults import told

WAIT_S = 10.0  # how long a locked book is waited for before giving up

_WRITES = "windctl_writes"


class Store:
    """Connections to one file. May be used from several threads; each transaction belongs to one."""

    def __init__(self, path: Path, mode: str, wait_s: float = WAIT_S) -> None:
        """`mode`: "ro" reads only, "rw" needs the file, "rwc" makes it."""
        self.path = path.absolute()
        self.wait_s = wait_s
        self.readonly = mode == "ro"
        uri = f"{self.path.as_uri()}?mode={mode}"

        def connect() -> sqlite3.Connection:
            connection = sqlite3.connect(
                uri,
                uri=True,
                timeout=wait_s,
                isolation_level=None,  # the driver begins nothing by itself
                check_same_thread=False,  # the pool lends a connection to one thread at a time
            )
            # A damaged text still reads, so that what is wrong with it can be said.
            connection.text_factory = partial(str, encoding="utf-8", errors="surrogateescape")
            return connection

        self._engine = sa.create_engine("sqlite+pysqlite://", creator=connect, poolclass=sa.pool.QueuePool)
        self._writing = self._engine.execution_options(**{_WRITES: True})
        sa.event.listen(self._engine, "connect", _prepare)
        sa.event.listen(self._engine, "begin", _begin)

    @contextmanager
    def reading(self) -> Iterator[sa.Connection]:
        """A transaction that sees one state of the book. Raises BookError."""
        with told(self.path, self.wait_s), self._engine.begin() as connection:
            yield connection

    @contextmanager
    def atomic(self) -> Iterator[sa.Connection]:
        """A transaction: on the disk when the block ends, undone when it raises. Raises BookError."""
        with told(self.path, self.wait_s), self._writing.begin() as connection:
            yield connection

    @contextmanager
    def bare(self) -> Iterator[sqlite3.Connection]:
        """The driver's own connection, outside any transaction. Raises BookError."""
        with told(self.path, self.wait_s), closing(self._engine.raw_connection()) as connection:
            yield cast(sqlite3.Connection, connection.driver_connection)

    def close(self) -> None:
        """Close what is open; a later use opens anew."""
        self._engine.dispose()


def _prepare(connection: sqlite3.Connection, _record: object) -> None:
    for pragma in ("synchronous=EXTRA", "fullfsync=ON", "foreign_keys=ON"):
        connection.execute(f"PRAGMA {pragma}")


def _begin(connection: sa.Connection) -> None:
    writes = connection.get_execution_options().get(_WRITES, False)
    connection.exec_driver_sql("BEGIN IMMEDIATE" if writes else "BEGIN")
