"""What stands in the way is said in the operator's words, with what to do; nothing comes out raw."""

from __future__ import annotations

import os
import sqlite3
import threading
from contextlib import closing
from pathlib import Path

import pytest
import sqlalchemy as sa

from tests.book.samples import files_beside, packed, started, wind, wound
from windctl.book.book import Book
from windctl.book.faults import said
from windctl.book.open import open_book
from windctl.book.store import Store
from windctl.errors import BookError
from windctl.record.events import NoteMade

# All primary result codes that this Python's SQLite knows, by the names of SQLite's documentation.
CODES = {
    name: value
    for name, value in vars(sqlite3).items()
    if name.startswith("SQLITE_") and isinstance(value, int) and name.count("_") == 1
}
ERROR_CODES = [
    "ERROR",
    "INTERNAL",
    "PERM",
    "ABORT",
    "BUSY",
    "LOCKED",
    "NOMEM",
    "READONLY",
    "INTERRUPT",
    "IOERR",
    "CORRUPT",
    "NOTFOUND",
    "FULL",
    "CANTOPEN",
    "PROTOCOL",
    "EMPTY",
    "SCHEMA",
    "TOOBIG",
    "CONSTRAINT",
    "MISMATCH",
    "MISUSE",
    "NOLFS",
    "AUTH",
    "FORMAT",
    "RANGE",
    "NOTADB",
]


@pytest.mark.parametrize("name", ERROR_CODES)
def test_every_error_of_the_lower_library_says_which_book_and_what_to_do(name: str) -> None:
    error = sqlite3.OperationalError("detail")
    error.sqlite_errorcode = CODES[f"SQLITE_{name}"]
    for met in (error, sa.exc.OperationalError("SELECT 1", {}, error)):
        text = str(said(met, Path("shop.book"), 10.0))
        assert "shop.book" in text
        assert "detail" in text
        assert any(word in text for word in ("keep", "close", "check", "choose", "free", "allow")), text


def test_an_extended_code_means_what_its_primary_one_means() -> None:
    error = sqlite3.OperationalError("x")
    error.sqlite_errorcode = sqlite3.SQLITE_READONLY_DBMOVED
    assert "read only" in str(said(error, Path("b"), 1.0))


def test_a_book_locked_by_another_program(book: Book, path: Path) -> None:
    with open_book(path, wait_s=0.05) as impatient, closing(sqlite3.connect(path)) as other:
        wind(impatient, 1, turns=1)
        other.execute("BEGIN EXCLUSIVE")
        with pytest.raises(BookError, match=r"locked for more than 0\.05 s: close what else"):
            impatient.begin_coil("b1", 2026, started(2))
        with pytest.raises(BookError, match=r"locked for more than 0\.05 s: close what else"):
            impatient.list()
        other.rollback()
        assert impatient.count() == 1


def test_a_writer_waits_for_a_lock_that_goes_away(book: Book, path: Path) -> None:
    with (
        closing(sqlite3.connect(path, check_same_thread=False)) as other,
        book.begin_coil("b1", 2026, started(1)) as writer,
    ):
        other.execute("BEGIN EXCLUSIVE")
        timer = threading.Timer(0.3, other.rollback)
        timer.start()
        writer.commit(packed([NoteMade(1, "waited", "Demo Winder")]))
        timer.join()
    assert book.find("1").n_entries == 2


def test_a_book_opened_for_reading_only(copied: Path) -> None:
    before = copied.read_bytes()
    with open_book(copied, readonly=True) as book:
        assert book.count() == 3
        with pytest.raises(BookError, match="is read only here: allow writing"):
            book.begin_coil("b1", 2026, started(9))
        with book.reopen("b1-2026-0002") as writer, pytest.raises(BookError, match="is read only here"):
            writer.commit(packed([NoteMade(1, "x", "Demo Winder")]))
    assert copied.read_bytes() == before
    assert files_beside(copied) == []


@pytest.mark.skipif(
    not hasattr(os, "geteuid") or os.geteuid() == 0,
    reason="platform: file permissions do not bind this user",
)
def test_a_file_without_write_permission_can_be_read(copied: Path) -> None:
    copied.chmod(0o444)
    with open_book(copied) as book:
        assert book.verify().good
        with pytest.raises(BookError, match="is read only here"):
            book.begin_coil("b1", 2026, started(9))


def test_a_file_that_is_something_else_is_not_touched(path: Path) -> None:
    others: list[bytes] = [b"turn,ohm,celsius\n100,85.2,21.5\n" * 100, b"x", bytes(4096)]
    with closing(sqlite3.connect(path, isolation_level=None)) as connection:
        connection.execute("PRAGMA journal_mode=WAL")
        connection.execute("CREATE TABLE coils (number TEXT)")
    others.append(path.read_bytes())
    for content in others:
        path.write_bytes(content)
        for readonly in (True, False):
            with pytest.raises(BookError, match="is not a coil book"):
                open_book(path, readonly=readonly)
        assert path.read_bytes() == content
    path.unlink()
    path.mkdir()
    with pytest.raises(BookError, match="is a folder, not a coil book"):
        open_book(path)


def test_an_empty_file_becomes_a_book(path: Path) -> None:
    path.touch()
    with open_book(path) as book:
        assert book.verify().good


def test_a_missing_folder_or_file(tmp_path: Path) -> None:
    with pytest.raises(BookError, match=r"the folder .*nowhere for the coil book is missing: make it"):
        open_book(tmp_path / "nowhere" / "shop.book")
    for options in ({"create": False}, {"readonly": True}):
        with pytest.raises(BookError, match="there is no coil book"):
            open_book(tmp_path / "shop.book", **options)
    assert list(tmp_path.iterdir()) == []


def test_a_book_without_a_ledger(book: Book, path: Path) -> None:
    with closing(sqlite3.connect(path, isolation_level=None)) as connection:
        connection.execute("DELETE FROM ledger")
    with pytest.raises(BookError, match="does not say which schema it has"):
        open_book(path)
    with closing(sqlite3.connect(path, isolation_level=None)) as connection:
        connection.execute("DROP TABLE ledger")
    with pytest.raises(BookError, match="no such table: ledger"):
        open_book(path)


def test_a_book_that_another_program_put_into_another_mode(copied: Path) -> None:
    with closing(sqlite3.connect(copied, isolation_level=None)) as connection:
        connection.execute("PRAGMA journal_mode=WAL")
    with open_book(copied) as book, closing(sqlite3.connect(copied)) as connection:
        assert connection.execute("PRAGMA journal_mode").fetchone() == ("delete",)
        assert book.verify().good


def test_a_damaged_file_is_reported_not_raised_raw(copied: Path) -> None:
    content = bytearray(copied.read_bytes())
    for page in range(2, len(content) // 4096):
        content[page * 4096] ^= 0xFF  # the kind of each page
    copied.write_bytes(content)
    try:
        with open_book(copied) as book:
            broken = [str(finding) for finding in book.verify().broken]
    except BookError as error:
        broken = [str(error)]
    assert any("damaged" in text for text in broken)


def test_a_path_with_signs_that_mean_something_elsewhere(tmp_path: Path) -> None:
    path = tmp_path / "ü 100%?mode=ro#1.book"
    with open_book(path) as book:
        wind(book, 1, turns=1)
    assert path.exists()
    with open_book(path, readonly=True) as book:
        assert book.verify().checked == 1


def test_a_book_stays_usable_after_an_error(book: Book) -> None:
    with pytest.raises(BookError):
        book.find("no-such-coil")
    with book.begin_coil("b1", 2026, started(1)) as writer:
        writer.commit(packed(wound(writer.started, 1)))
    assert book.verify().good


def test_what_is_raised_inside_a_transaction_undoes_it(path: Path) -> None:
    open_book(path).close()
    store = Store(path, "rw")
    with pytest.raises(ZeroDivisionError), store.atomic() as connection:
        connection.exec_driver_sql("INSERT INTO numbers VALUES ('b1', 2026, 5)")
        raise ZeroDivisionError
    with store.reading() as connection:
        assert connection.exec_driver_sql("SELECT count(*) FROM numbers").scalar() == 0
    store.close()
