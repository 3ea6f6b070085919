"""Killed in the middle of a migration, a seal or an import, a book is whole: as before or as after."""

from __future__ import annotations

import random
import sqlite3
import time
from contextlib import closing
from pathlib import Path

import pytest

from tests.book.processes import child, line
from tests.book.samples import finished, packed, seal, wind
from tests.book.test_ledger import NEWEST, old_book, schema, statements
from windctl.book.exchange import Hand, coil_of, coils_in
from windctl.book.open import open_book

COILS = 8  # in the file that is imported


def killed(task: str, path: Path, wait_s: float, *arguments: str) -> None:
    """A process doing `task` on a book, killed `wait_s` after it began."""
    with child(task, path, *arguments) as process:
        assert line(process) == "ready"
        time.sleep(wait_s)
        process.kill()
        process.wait(10)


def migration(folder: Path, wait_s: float) -> str:
    """Whether the book was found as it was or on one of the later schemas; with all coils in any case."""
    old, path = folder / "old", folder / "shop.book"
    if not old.exists():
        old_book(old, 1)
    killed("migrate", path, wait_s, str(old))
    if not path.exists():
        return "nothing yet"
    with closing(sqlite3.connect(path)) as connection:
        (version,) = connection.execute("SELECT max(version) FROM ledger").fetchone()
    assert schema_of(path, version)
    with open_book(path, create=False) as book:
        assert book.verify().broken == ()
        assert book.count() == 3
        assert [head.number for head in book.list("spool:s1")] == ["b1-2026-0001"]
    for backup in folder.glob("*.before-*"):
        backup.unlink()
    return f"schema {version}"


def schema_of(path: Path, version: int) -> bool:
    """The tables are those of one schema, with nothing of another. Tables that were altered, as in the third,
    differ in their text from those made so."""
    if version < 3:
        return schema(path) == statements(version)
    third = all(name in schema(path) for name in ("spool TEXT", "words TEXT", "coils_found"))
    fourth = [name in schema(path) for name in ("TABLE lessons", "lessons_by_time", "lessons_by_bobbin")]
    return third and (all(fourth) if version == NEWEST else not any(fourth))


def sealing(folder: Path, wait_s: float) -> str:
    """Whether the last coil was found sealed or open; an open one can be gone on with."""
    path = folder / "shop.book"
    path.unlink(missing_ok=True)
    killed("wind_on", path, wait_s)
    with open_book(path) as book:
        assert book.verify().broken == ()
        heads = book.list()
        assert all(head.sealed for head in heads if head.number != heads[0].number)
        if not heads or heads[0].sealed:
            return "sealed"
        with book.reopen(heads[0].id) as writer:
            rows = list(book.entries(writer.id))
            if rows[-1].kind != "coil_finished":
                writer.commit(packed([finished(1)]))
            seal(book, writer)
        assert book.verify().broken == ()
    return "open"


def importing(folder: Path, wait_s: float) -> str:
    """How many coils were found; each whole, and the import goes on where it was cut off."""
    file, path = folder / "coils.jsonl", folder / "shop.book"
    if not file.exists():
        with open_book(folder / "other.book") as other:
            heads = [wind(other, n, turns=1) for n in range(COILS)]
            file.write_bytes(b"".join(other.export_lines(heads)))
    path.unlink(missing_ok=True)
    killed("take_in", path, wait_s, str(file))
    with open_book(path) as book:
        assert book.verify().broken == ()
        there = book.list()
        said = b"".join(book.export_lines(there)).splitlines()[1:]
        assert said == file.read_bytes().splitlines()[1 : 1 + len(there)]
        taken = [book.take_in(coil_of(text), Hand("", "", False)).how for text in coils_in(file)[1]]
        assert taken == ["same"] * len(there) + ["new"] * (COILS - len(there))
        assert b"".join(book.export_lines(book.list())) == file.read_bytes()
        assert book.verify().broken == ()
    return f"{len(there)} imported"


@pytest.mark.parametrize("what", [migration, sealing, importing])
def test_a_kill_leaves_the_state_before_or_after(tmp_path: Path, what: object) -> None:
    draw = random.Random(f"kills of {what.__name__}")  # type: ignore[attr-defined]  # a function
    for _ in range(2):
        what(tmp_path, draw.uniform(0.0, 0.3))  # type: ignore[operator]  # one of three


@pytest.mark.long
@pytest.mark.timeout(1200)
def test_a_hundred_kills_leave_the_state_before_or_after(tmp_path: Path) -> None:
    draw = random.Random("a hundred kills")
    seen: dict[str, int] = {}
    for n in range(102):
        what = (migration, sealing, importing)[n % 3]
        folder = tmp_path / what.__name__
        folder.mkdir(exist_ok=True)
        found = what(folder, draw.uniform(0.0, 0.4))
        seen[found] = seen.get(found, 0) + 1
    print(seen)
    assert len(seen) >= 6  # kills fell into different moments
