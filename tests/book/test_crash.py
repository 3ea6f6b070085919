"""A writer that dies at any moment leaves a book that verifies and a coil that can go on."""

from __future__ import annotations

import sys
import time
from pathlib import Path

import pytest

from tests.book.processes import child, line
from tests.book.samples import files_beside, finished, packed, seal
from windctl.book.open import open_book
from windctl.record.events import NoteMade


@pytest.mark.parametrize("wait_ms", [0, 23, 80])
def test_a_writer_killed_at_any_moment_loses_nothing_that_was_committed(path: Path, wait_ms: int) -> None:
    open_book(path).close()
    with child("write", path) as process:
        durable = int(line(process))
        until = time.monotonic() + wait_ms / 1000
        while time.monotonic() < until:
            durable = int(line(process))
        process.kill()
        process.wait(10)
        assert process.stdout is not None
        durable = max([durable, *(int(said) for said in process.stdout.read().split("\n")[:-1])])
    with open_book(path, create=False) as book:
        head = book.find("1")
        assert durable <= head.n_entries <= durable + 1  # the last one may have made it without being said
        assert book.verify().broken == ()
        with book.reopen("1") as writer:
            writer.commit(packed([finished()]))
            seal(book, writer)
        assert book.verify().broken == ()
    assert files_beside(path) == []


def test_a_writer_killed_half_way_through_a_commit_leaves_the_state_before(path: Path) -> None:
    """Half of the commit is in the file already; the journal beside it takes it back."""
    open_book(path).close()
    size = path.stat().st_size
    with child("write_half", path) as process:
        assert line(process) == "begun"
        assert line(process) == "stuck"
        process.kill()
        process.wait(10)
    assert path.stat().st_size > size + 300_000  # most of 200 rows of 3 000 bytes
    journal = path.with_name(path.name + "-journal")
    assert journal.stat().st_size > 0
    with open_book(path, create=False) as book:
        assert book.verify().broken == ()
        notes = [event for event in book.events("1") if isinstance(event, NoteMade)]
        assert [note.text for note in notes] == ["x" * 500] * 20
        with book.reopen("1") as writer:
            writer.commit(packed([NoteMade(0, "goes on", "Demo Winder")]))
        assert book.verify().broken == ()
    assert files_beside(path) == []


@pytest.mark.skipif(sys.platform == "win32", reason="platform: no limit can be set to a file's size")
def test_a_disk_without_room_loses_nothing_and_the_commit_can_be_repeated(path: Path) -> None:
    with child("outgrow", path) as process:
        said = line(process)
        assert said.startswith("the disk that holds the coil book")
        assert str(path) in said
        assert line(process) == "()"
        assert line(process) == "1"
        assert line(process) == "()"
        assert line(process) == "61"
        assert process.wait(10) == 0
