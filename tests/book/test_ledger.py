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

from tests.book.samples import ENDED, files_beside, finished, packed, seal, wind
from windctl.book.book import Book
from windctl.book.ledger import APPLICATION_ID, STEPS, Step, bring_up, names
from windctl.book.open import open_book
from windctl.book.store import Store
from windctl.book.tables import metadata
from windctl.errors import BookError
from windctl.record.addenda import CoilNoted
from windctl.record.events import NoteMade

HERE = Path(__file__).parent
NEWEST = 4
NEXT = NEWEST + 1


def add_shelf(connection: sa.Connection) -> None:
    """A change that a later version might make."""
    connection.exec_driver_sql("ALTER TABLE coils ADD COLUMN shelf TEXT")


def fail_half_way(connection: sa.Connection) -> None:
    """A change that does not get to its end."""
    add_shelf(connection)
    connection.exec_driver_sql("ALTER TABLE absent ADD COLUMN shelf TEXT")


LATER = (*STEPS, Step(NEXT, "a shelf for each coil", add_shelf))


def schema(path: Path) -> str:
    """The statements that made the tables of a file, in order of name."""
    with closing(sqlite3.connect(path)) as connection:
        rows = connection.execute("SELECT sql FROM sqlite_schema WHERE sql IS NOT NULL ORDER BY name")
        return "\n".join(" ".join(str(row[0]).split()) + ";" for row in rows) + "\n"


def ledger_of(path: Path) -> list[tuple[int, str]]:
    """What the ledger of a file says."""
    with closing(sqlite3.connect(path)) as connection:
        return connection.execute("SELECT version, name FROM ledger ORDER BY version").fetchall()


def statements(schema_number: int) -> str:
    """What made the tables of a schema."""
    return (HERE / f"schema_{schema_number}.sql").read_text(encoding="utf-8")


def shape(path: Path) -> dict[str, list[tuple[object, ...]]]:
    """What SQLite says of a file's tables and indexes, however they came about."""
    seen: dict[str, list[tuple[object, ...]]] = {}
    with closing(sqlite3.connect(path)) as connection:
        for kind, name in connection.execute("SELECT type, name FROM sqlite_schema").fetchall():
            about = ("index_xinfo",) if kind == "index" else ("table_xinfo", "foreign_key_list")
            for pragma in about:
                seen[f"{name} {pragma}"] = connection.execute(f"PRAGMA {pragma}({name!r})").fetchall()
    return seen


def old_book(path: Path, schema_number: int) -> None:
    """A book as the version of windctl wrote it that had this schema: two closed coils and an open one."""
    with closing(sqlite3.connect(path)) as connection:
        connection.executescript((HERE / f"book_of_schema_{schema_number}.sql").read_text(encoding="utf-8"))


def test_the_tables_of_the_newest_schema_are_what_they_always_were(book: Book, path: Path) -> None:
    """Books with them exist. To change a table, append a step to the ledger and add a schema file."""
    assert schema(path) == statements(NEWEST)
    assert ledger_of(path) == names()
    assert names() == [
        (1, "coils, entries, curve"),
        (2, "logs, log_entries"),
        (3, "coils: spool, words"),
        (4, "lessons; words of partings"),
    ]


@pytest.mark.parametrize("old", [1, 2])
def test_a_book_of_an_older_schema_is_brought_up_with_all_that_is_in_it(
    path: Path, tmp_path: Path, old: int
) -> None:
    old_book(path, old)
    assert schema(path) == statements(old)
    with pytest.raises(BookError, match=f"must be brought to {NEWEST} first"):
        open_book(path, readonly=True)
    assert schema(path) == statements(old)
    with open_book(path) as book:
        assert book.verify().broken == ()
        assert ledger_of(path) == names()
        assert [head.number for head in book.list("spool:s1")] == ["b1-2026-0001"]
        assert [head.number for head in book.list('"SPLICE-free"')] == ["b2-2026-0001", "b1-2026-0001"]
        later = {2: ["b1-2026-0001"], 1: []}[old]
        assert [head.number for head in book.list('note:"was damp" GRÖSSER')] == later
        book.amend("b1-2026-0001", CoilNoted(ENDED, "Demo Winder", "brought along"))
        assert [head.number for head in book.list('"brought along"')] == ["b1-2026-0001"]
        with book.reopen("b1-2026-0002") as writer:
            writer.commit(packed([NoteMade(0, "goes on", "Demo Winder"), finished(1)]))
            seal(book, writer)
        assert book.verify().broken == ()
    new = tmp_path / "new.book"
    open_book(new).close()
    assert shape(path) == shape(new)
    steps = range(old + 1, NEWEST + 1)
    assert files_beside(path) == sorted(["new.book", *(f"shop.book.before-{step}" for step in steps)])
    assert schema(path.with_name(f"shop.book.before-{old + 1}")) == statements(old)


def test_a_book_of_schema_3_tells_what_teaches_and_why_pairs_were_parted(path: Path, tmp_path: Path) -> None:
    """Written by the version that had it: a coil that taught, was parted from its pair, noted and withdrawn
    (in this order, in its log); its former partner, which has nothing to be compared with; a coil whose
    lesson was not written down; an open one."""
    old_book(path, 3)
    assert schema(path) == statements(3)
    with open_book(path) as book:
        assert book.verify().broken == ()
        assert ledger_of(path) == names()
        apart = [head.number for head in book.list('note:"wanted them apart"')]
        assert apart == ["b2-2026-0001", "b1-2026-0001"]
        assert [(one.lesson.coil, one.withdrawn) for one in book.lessons()] == [
            ("b1-2026-0001", "was damp"),
            ("b2-2026-0002", None),
        ]
    with closing(sqlite3.connect(path)) as connection:
        rows = "SELECT number, how, lessons.spool FROM coils LEFT JOIN lessons ON coil = id ORDER BY number"
        assert connection.execute(rows).fetchall() == [
            ("b1-2026-0001", "withdrawn", "s1"),
            ("b1-2026-0002", None, None),
            ("b2-2026-0001", "nothing", ""),
            ("b2-2026-0002", "untold", ""),
        ]
    new = tmp_path / "new.book"
    open_book(new).close()
    assert shape(path) == shape(new)
    assert files_beside(path) == ["new.book", "shop.book.before-4"]


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
    assert ledger_of(path) == [*names(), (NEXT, "a shelf for each coil")]
    assert backup == path.with_name("shop.book.before-5")
    assert files_beside(path) == ["shop.book.before-5"]
    assert ledger_of(backup) == names()
    assert len(backup.read_bytes()) == len(before)
    with open_book(backup, create=False) as old:
        assert old.find("1") == head
        assert old.verify().good
    with closing(sqlite3.connect(path)) as connection:
        assert connection.execute("SELECT number, shelf FROM coils").fetchall() == [(head.number, None)]


def test_a_backup_never_replaces_another(book: Book, path: Path) -> None:
    path.with_name("shop.book.before-5").write_bytes(b"kept")
    store = Store(path, "rw")
    assert bring_up(store, LATER) == [path.with_name("shop.book.before-5-2")]
    store.close()
    assert path.with_name("shop.book.before-5").read_bytes() == b"kept"


def test_a_step_that_fails_leaves_the_book_as_it_was(book: Book, path: Path) -> None:
    wind(book, 1, turns=2)
    before = schema(path)
    store = Store(path, "rw")
    with pytest.raises(BookError, match="no such table: absent"):
        bring_up(store, (*STEPS, Step(NEXT, "breaks", fail_half_way)))
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
    assert backups == [path.with_name("shop.book.before-5")]
    assert ledger_of(path) == [*names(), (NEXT, "a shelf for each coil")]


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
    assert schema(path) == statements(NEWEST)
    assert ledger_of(path) == names()


def test_a_new_book_of_a_later_version_lists_all_steps(path: Path) -> None:
    store = Store(path, "rwc")
    assert bring_up(store, LATER) == []
    store.close()
    assert ledger_of(path) == [*names(), (NEXT, "a shelf for each coil")]
    assert files_beside(path) == []


def test_a_newer_book_is_left_alone(book: Book, path: Path) -> None:
    store = Store(path, "rw")
    bring_up(store, LATER)
    store.close()
    before = path.read_bytes()
    for readonly in (False, True):
        with pytest.raises(BookError, match="has schema 5; this windctl knows schemas up to 4"):
            open_book(path, readonly=readonly)
    assert path.read_bytes() == before


def test_an_older_book_is_not_taken_forward_when_only_read(book: Book, path: Path) -> None:
    before = path.read_bytes()
    store = Store(path, "ro")
    with pytest.raises(BookError, match="must be brought to 5 first"):
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
