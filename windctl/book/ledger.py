"""Which schema a book has, and the way forward from an older one.

The file's application id says that it is a coil book at all; the ledger table lists every schema the file
went through. Steps only go forward, each in one transaction after a backup file was written beside the book.
A book of a newer windctl is left alone.
"""

from __future__ import annotations

import os
import sqlite3
from collections.abc import Callable, Sequence
from contextlib import closing
from dataclasses import dataclass
from pathlib import Path

import sqlalchemy as sa

from windctl.book.schema_3 import add_spool_and_words
from windctl.book.schema_4 import add_lessons
from windctl.book.store import Store
from windctl.book.tables import ledger, log_entries, logs, metadata
from windctl.errors import BookError, BookOutdated, RecordBroken

APPLICATION_ID = 0x77434231  # "wCB1"


@dataclass(frozen=True, slots=True)
class Step:
    """The way from schema `version - 1` to `version`; `change` alters tables in the transaction given."""

    version: int
    name: str
    change: Callable[[sa.Connection], None]


FIRST = "coils, entries, curve"


def _add_logs(connection: sa.Connection) -> None:
    metadata.create_all(connection, tables=[logs, log_entries])


# Later schemas are appended here; what is in here never changes.
STEPS: tuple[Step, ...] = (
    Step(2, "logs, log_entries", _add_logs),
    Step(3, "coils: spool, words", add_spool_and_words),
    Step(4, "lessons; words of partings", add_lessons),
)


def names(steps: Sequence[Step] = STEPS) -> list[tuple[int, str]]:
    """What the ledger of an up-to-date book says: (version, name), oldest first."""
    return [(1, FIRST), *((step.version, step.name) for step in steps)]


def bring_up(store: Store, steps: Sequence[Step] = STEPS) -> list[Path]:
    """Make the tables of an empty file, or take an older book forward; the backups that were written.

    Raises BookError for a file that is no coil book or is newer than this program, RecordBroken for one that
    tells of schemas that never followed each other.
    """
    version = _version(store)
    newest = steps[-1].version
    if version > newest:
        raise BookError(
            f"the coil book {store.path} has schema {version}; this windctl knows schemas up to {newest}: "
            "use the windctl that wrote it, or a newer one; nothing was changed in it"
        )
    if version == newest:
        return []
    if store.readonly:
        raise BookOutdated(
            f"the coil book {store.path} has schema {version} and must be brought to {newest} first, "
            "but it is open for reading only: open it once for writing"
        )
    if version == 0:
        _create(store, steps)
        return []
    return [backup for step in steps if step.version > version if (backup := _take(store, step)) is not None]


def _version(store: Store) -> int:
    """The file's schema; 0 of an empty file."""
    with store.reading() as connection:
        return _version_inside(store.path, connection)


def _version_inside(path: Path, connection: sa.Connection) -> int:
    tables = connection.exec_driver_sql("SELECT count(*) FROM sqlite_schema").scalar_one()
    mark = connection.exec_driver_sql("PRAGMA application_id").scalar_one()
    if tables == 0 and mark == 0:
        return 0
    if mark != APPLICATION_ID:
        raise BookError(
            f"{path} is not a coil book, but some other database: choose another file with --book; "
            "nothing was changed in it"
        )
    versions = list(connection.scalars(sa.select(ledger.c.version).order_by(ledger.c.version)))
    if not versions:
        raise BookError(f"the coil book {path} does not say which schema it has: go back to a backup of it")
    if versions != list(range(1, len(versions) + 1)):
        raise RecordBroken(
            f"the coil book {path}: the ledger of schemas was altered, it lists {versions!r}: "
            "go back to a backup of it; nothing was changed in it"
        )
    return len(versions)


def _create(store: Store, steps: Sequence[Step]) -> None:
    with store.atomic() as connection:
        if _version_inside(store.path, connection) != 0:
            return  # another process made it while this one waited for the lock
        connection.exec_driver_sql(f"PRAGMA application_id = {APPLICATION_ID}")
        metadata.create_all(connection)
        rows = [{"version": version, "name": name} for version, name in names(steps)]
        connection.execute(sa.insert(ledger), rows)


def _take(store: Store, step: Step) -> Path | None:
    """Take one step; the backup written before it, or None where another process was quicker."""
    with store.atomic() as connection:
        if _version_inside(store.path, connection) != step.version - 1:
            return None
        backup = _back_up(store.path, step.version)
        step.change(connection)
        connection.execute(sa.insert(ledger), [{"version": step.version, "name": step.name}])
        return backup


def _back_up(path: Path, version: int) -> Path:
    """A copy of the book as last committed, on the disk when this returns; never over an existing file."""
    target, n = path.with_name(f"{path.name}.before-{version}"), 1
    while target.exists():
        n += 1
        target = path.with_name(f"{path.name}.before-{version}-{n}")
    with (
        closing(sqlite3.connect(f"{path.as_uri()}?mode=ro", uri=True)) as source,
        closing(sqlite3.connect(target)) as copy,
    ):
        source.backup(copy)
    handle = os.open(target, os.O_RDWR)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)
    return target
