"""A book to another file while it is written, and back; nothing is ever written over unasked."""

from __future__ import annotations

import shutil
import sqlite3
import threading
from contextlib import closing
from pathlib import Path

import pytest

from tests.book.samples import coil_id, files_beside, packed, started, stocked, wind, wound
from windctl.book.backup import back_up, restore
from windctl.book.book import Book
from windctl.book.ledger import APPLICATION_ID
from windctl.book.open import open_book
from windctl.errors import BookError, RecordBroken
from windctl.record.events import NoteMade


def content(path: Path) -> list[str]:
    """All that is in a file, as SQLite dumps it."""
    with closing(sqlite3.connect(path)) as connection:
        return list(connection.iterdump())


def test_a_backup_holds_all_that_the_book_holds(book: Book, path: Path, tmp_path: Path) -> None:
    wind(book, 1, turns=1)
    stocked(book)
    book.begin_coil("b1", 2026, started(2)).close()
    to = tmp_path / "kept.book"
    report = back_up(path, to)
    assert (report.checked, report.broken) == (2, ())
    assert content(to) == content(path)
    with closing(sqlite3.connect(to)) as connection:
        assert connection.execute("PRAGMA application_id").fetchone() == (APPLICATION_ID,)
    assert files_beside(path) == ["kept.book"]


def test_a_backup_while_a_coil_is_wound_is_of_one_moment(book: Book, path: Path, tmp_path: Path) -> None:
    stop = threading.Event()
    committed = 0

    writer = book.begin_coil("b1", 2026, started(1))

    def wind_on() -> None:
        nonlocal committed
        while not stop.wait(0.002):
            writer.commit(packed([NoteMade(committed, "x" * 3000, "Demo Winder")]))
            committed += 1

    thread = threading.Thread(target=wind_on)
    thread.start()
    try:
        for n in range(4):
            before = committed
            to = tmp_path / f"kept-{n}.book"
            assert back_up(path, to).good
            with open_book(to, readonly=True) as copy:
                assert copy.find("1").n_entries >= 1 + before
    finally:
        stop.set()
        thread.join()
        writer.close()
    assert book.verify().broken == ()
    assert book.find("1").n_entries == 1 + committed


def test_nothing_is_written_over_unasked(book: Book, path: Path, tmp_path: Path) -> None:
    wind(book, 1, turns=1)
    to = tmp_path / "kept.book"
    to.write_bytes(b"dear")
    with pytest.raises(BookError, match=r"is there already: name another file, or say --replace"):
        back_up(path, to)
    assert to.read_bytes() == b"dear"
    assert back_up(path, to, replace=True).good
    with pytest.raises(BookError, match="is there already"):
        restore(to, path)
    for nowhere in (tmp_path, tmp_path / "none" / "kept.book"):
        with pytest.raises(BookError, match="its folder is missing"):
            back_up(path, nowhere)


def test_a_damaged_book_gives_no_backup(copied: Path, tmp_path: Path) -> None:
    with closing(sqlite3.connect(copied, isolation_level=None)) as connection:
        connection.execute("UPDATE coils SET operator = 'another'")
    to = tmp_path / "kept.book"
    to.write_bytes(b"good one")
    with pytest.raises(RecordBroken, match=r"the book .* does not verify \(b1-2026-0001: operator is"):
        back_up(copied, to, replace=True)
    assert to.read_bytes() == b"good one"
    assert files_beside(copied) == ["kept.book", "kept.book.broken"]


def test_a_book_is_restored_where_there_is_none(book: Book, path: Path, tmp_path: Path) -> None:
    head = wind(book, 1, turns=1)
    kept = tmp_path / "kept.book"
    back_up(path, kept)
    book.close()
    before = kept.read_bytes()
    path.unlink()
    report, was = restore(kept, path)
    assert (report.checked, was) == (1, None)
    assert kept.read_bytes() == before
    with open_book(path) as again:
        assert again.find("1") == head
        assert wind(again, 2, turns=1).number == "b1-2026-0002"
    assert files_beside(path) == ["kept.book"]


def test_the_book_that_is_replaced_is_kept(book: Book, path: Path, tmp_path: Path) -> None:
    wind(book, 1, turns=1)
    kept = tmp_path / "kept.book"
    back_up(path, kept)
    wind(book, 2, turns=1)
    book.close()
    late = content(path)
    for name in ("shop.book.before-restore", "shop.book.before-restore-2"):
        _, was = restore(kept, path, replace=True)
        assert was == path.with_name(name)
    assert content(path) == content(kept)
    assert content(path.with_name("shop.book.before-restore")) == late


def test_a_damaged_book_is_replaced_without_its_journal(book: Book, path: Path, tmp_path: Path) -> None:
    """A journal of the old file would be played back into the new one."""
    wind(book, 1, turns=1)
    kept = tmp_path / "kept.book"
    back_up(path, kept)
    book.close()
    damaged = b"no book at all" + path.read_bytes()[14:]
    path.write_bytes(damaged)
    journal = path.with_name("shop.book-journal")
    journal.write_bytes(bytes.fromhex("d9d505f920a163d7") + b"\x01" * 504 + b"\x02" * 4096)
    _, was = restore(kept, path, replace=True)
    assert content(path) == content(kept)
    assert not journal.exists()
    assert was is not None
    assert was.read_bytes() == damaged


def test_no_book_is_replaced_while_a_coil_is_written(book: Book, path: Path, tmp_path: Path) -> None:
    wind(book, 1, turns=1)
    kept = tmp_path / "kept.book"
    back_up(path, kept)
    with book.begin_coil("b1", 2026, started(2)) as writer:
        writer.commit(packed(wound(writer.started, 1)))
        before = content(path)
        with pytest.raises(BookError, match=r"is being written \(process \d+\): end that first"):
            restore(kept, path, replace=True)
        assert content(path) == before
    assert files_beside(path) == ["kept.book"]
    restore(kept, path, replace=True)


def test_what_does_not_verify_is_not_restored(copied: Path, tmp_path: Path) -> None:
    kept = tmp_path / "kept.book"
    shutil.copyfile(copied, kept)
    with closing(sqlite3.connect(kept, isolation_level=None)) as connection:
        connection.execute("DELETE FROM entries WHERE coil = ? AND seq = 2", [coil_id(1)])
    before = content(copied)
    with pytest.raises(RecordBroken, match=r"the backup .* does not verify \(b1-2026-0001, row 2"):
        restore(kept, copied, replace=True)
    assert content(copied) == before
    (tmp_path / "odd.book").write_bytes(b"no book")
    with pytest.raises(BookError, match="is not a coil book"):
        restore(tmp_path / "odd.book", copied, replace=True)
    assert content(copied) == before


def test_a_backup_of_an_older_schema_is_taken_forward(path: Path, tmp_path: Path) -> None:
    old = tmp_path / "old.book"
    with closing(sqlite3.connect(old)) as connection:
        statements = Path(__file__).with_name("book_of_schema_1.sql").read_text(encoding="utf-8")
        connection.executescript(statements)
    before = content(old)
    report, _ = restore(old, path)
    assert report.checked == 3
    assert content(old) == before
    with open_book(path, readonly=True) as book:
        assert [head.number for head in book.list("spool:s1")] == ["b1-2026-0001"]
    assert files_beside(path) == ["old.book"]
