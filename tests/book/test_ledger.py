"""Which schema a book has: made once, taken forward with a backup, never backward."""

from __future__ import annotations

import sqlite3
import threading
from contextlib import closing
from pathlib import Path

import pytest
import sqlalchemy as sa
from sqlalchemy.dialects import postgresql
from sqlalchemy.schema import CreateIndex, CreateTable

from tests.book.samples import ENDED, files_beside, wind
from windctl.book.book import Book
from windctl.book.ledger import APPLICATION_ID, FIRST, STEPS, Step, bring_up, names
from windctl.book.open import open_book
from windctl.book.store import Store
from windctl.book.tables import metadata
from windctl.errors import BookError
from windctl.record.addenda import CoilNoted

SCHEMA_1 = Path(__file__).with_name("schema_1.sql")
SCHEMA_2 = Path(__file__).with_name("schema_2.sql")


def add_shelf(connection: sa.Connection) -> None:
    """A change that a later version might make."""
    connection.exec_driver_sql("ALTER TABLE coils ADD COLUMN shelf TEXT")


def fail_half_way(connection: sa.Connection) -> None:
    """A change that does not get to its end."""
    add_shelf(connection)
    connection.exec_driver_sql("ALTER TABLE absent ADD COLUMN shelf TEXT")


LATER = (*STEPS, Step(3, "a shelf for each coil", add_shelf))


def schema(path: Path) -> str:
    """The statements that made the tables of a file, in order of name."""
    with closing(sqlite3.connect(path)) as connection:
        rows = connection.execute("SELECT sql FROM sqlite_schema WHERE sql IS NOT NULL ORDER BY name")
        return "\n".join(" ".join(str(row[0]).split()) + ";" for row in rows) + "\n"


def ledger_of(path: Path) -> list[tuple[int, str]]:
    """What the ledger of a file says."""
    with closing(sqlite3.connect(path)) as connection:
        return connection.execute("SELECT version, name FROM ledger ORDER BY version").fetchall()


def test_the_tables_of_schema_2_are_what_they_always_were(book: Book, path: Path) -> None:
    """Books with them exist. To change a table, append a step to the ledger and add a schema file."""
    assert schema(path) == SCHEMA_2.read_text(encoding="utf-8")
    assert ledger_of(path) == [(1, "coils, entries, curve"), (2, "logs, log_entries")] == names()


def test_a_book_of_schema_1_becomes_one_of_schema_2(path: Path) -> None:
    """With a coil in it that was wound before there were logs."""
    with closing(sqlite3.connect(path)) as connection:
        connection.executescript(SCHEMA_1.read_text(encoding="utf-8"))
        connection.execute(f"PRAGMA application_id = {APPLICATION_ID}")
        connection.execute("INSERT INTO ledger VALUES (1, ?)", [FIRST])
        connection.commit()
    with pytest.raises(BookError, match="must be brought to 2 first"):
        open_book(path, readonly=True)
    with open_book(path) as old:
        head = wind(old, 1, turns=2)
        old.amend(head.number, CoilNoted(ENDED, "Demo Winder", "brought along"))
        assert old.verify().good
    assert schema(path) == SCHEMA_2.read_text(encoding="utf-8")
    assert path.with_name("shop.book.before-2").exists()


def test_a_book_says_what_it_is(book: Book, path: Path) -> None:
    """Bytes 68 to 71 are the application id in SQLite's published file format."""
    assert path.read_bytes()[:16] == b"SQLite format 3\0"
    assert path.read_bytes()[68:72] == APPLICATION_ID.to_bytes(4, "big") == b"wCB1"


def test_an_older_book_is_backed_up_and_taken_forward(book: Book, path: Path) -> None:
    head = wind(book, 1, turns=2)
    before = path.read_bytes()
    store = Store(path, "rw")
    (backup,) = bring_up(store, LATER)
    assert bring_up(store, LATER) == []
    store.close()
    assert ledger_of(path) == [*names(), (3, "a shelf for each coil")]
    assert backup == path.with_name("shop.book.before-3")
    assert files_beside(path) == ["shop.book.before-3"]
    assert ledger_of(backup) == names()
    assert len(backup.read_bytes()) == len(before)
    with open_book(backup, create=False) as old:
        assert old.find("1") == head
        assert old.verify().good
    with closing(sqlite3.connect(path)) as connection:
        assert connection.execute("SELECT number, shelf FROM coils").fetchall() == [(head.number, None)]


def test_a_backup_never_replaces_another(book: Book, path: Path) -> None:
    path.with_name("shop.book.before-3").write_bytes(b"kept")
    store = Store(path, "rw")
    assert bring_up(store, LATER) == [path.with_name("shop.book.before-3-2")]
    store.close()
    assert path.with_name("shop.book.before-3").read_bytes() == b"kept"


def test_a_step_that_fails_leaves_the_book_as_it_was(book: Book, path: Path) -> None:
    wind(book, 1, turns=2)
    before = schema(path)
    store = Store(path, "rw")
    with pytest.raises(BookError, match="no such table: absent"):
        bring_up(store, (*STEPS, Step(3, "breaks", fail_half_way)))
    assert (schema(path), ledger_of(path)) == (before, names())
    assert book.verify().good
    assert bring_up(store, LATER)
    store.close()


def test_of_two_that_open_an_older_book_at_once_one_takes_the_step(book: Book, path: Path) -> None:
    backups: list[Path] = []
    gate = threading.Barrier(2)

    def work() -> None:
        store = Store(path, "rw")
        gate.wait()
        backups.extend(bring_up(store, LATER))
        store.close()

    threads = [threading.Thread(target=work) for _ in range(2)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert backups == [path.with_name("shop.book.before-3")]
    assert ledger_of(path) == [*names(), (3, "a shelf for each coil")]


def test_two_that_make_a_book_at_once_make_one(path: Path) -> None:
    gate = threading.Barrier(4)

    def work() -> None:
        gate.wait()
        open_book(path).close()

    threads = [threading.Thread(target=work) for _ in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert schema(path) == SCHEMA_2.read_text(encoding="utf-8")
    assert ledger_of(path) == names()


def test_a_new_book_of_a_later_version_lists_all_steps(path: Path) -> None:
    store = Store(path, "rwc")
    assert bring_up(store, LATER) == []
    store.close()
    assert ledger_of(path) == [*names(), (3, "a shelf for each coil")]
    assert files_beside(path) == []


def test_a_newer_book_is_left_alone(book: Book, path: Path) -> None:
    store = Store(path, "rw")
    bring_up(store, LATER)
    store.close()
    before = path.read_bytes()
    for readonly in (False, True):
        with pytest.raises(BookError, match="has schema 3; this windctl knows schemas up to 2"):
            open_book(path, readonly=readonly)
    assert path.read_bytes() == before


def test_an_older_book_is_not_taken_forward_when_only_read(book: Book, path: Path) -> None:
    before = path.read_bytes()
    store = Store(path, "ro")
    with pytest.raises(BookError, match="must be brought to 3 first"):
        bring_up(store, LATER)
    store.close()
    assert path.read_bytes() == before
    assert files_beside(path) == []


def test_postgresql_takes_the_same_tables() -> None:
    """Types as PostgreSQL's manual names them."""
    dialect = postgresql.dialect()  # type: ignore[no-untyped-call]  # SQLAlchemy leaves it untyped
    statements = [str(CreateTable(table).compile(dialect=dialect)) for table in metadata.sorted_tables]
    statements += [
        str(CreateIndex(index).compile(dialect=dialect))
        for table in metadata.sorted_tables
        for index in table.indexes
    ]
    words = {
        word.rstrip(",")
        for statement in statements
        for line in statement.splitlines()
        if line.startswith("\t") and not line.startswith(("\tPRIMARY", "\tFOREIGN", "\tUNIQUE"))
        for word in [line.split()[1]]
    }
    assert words == {"TEXT", "INTEGER", "DOUBLE", "BYTEA"}
    assert not any("SERIAL" in statement or "ROWID" in statement for statement in statements)
