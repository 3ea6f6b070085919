"""What the tests run in processes of their own: `python -m tests.book.child TASK BOOK [ARGUMENTS]`."""

from __future__ import annotations

import sqlite3
import sys
import time
from pathlib import Path

from tests.book.samples import coil_id, packed, started, wound
from windctl.book.open import open_book
from windctl.errors import BookError
from windctl.record.events import NoteMade


def say(text: object) -> None:
    """One line to the test that is waiting."""
    print(text, flush=True)


def number(path: Path, first: str, n: str) -> None:
    """Begin `n` coils, and say their numbers."""
    with open_book(path, wait_s=30.0) as book:
        say("ready")
        sys.stdin.readline()
        for k in range(int(first), int(first) + int(n)):
            with book.begin_coil("b1", 2026, started(k)) as writer:
                say(writer.number)


def write(path: Path) -> None:
    """Commit one row after the other without end, saying after each how many rows are on the disk."""
    with open_book(path) as book, book.begin_coil("b1", 2026, started(1)) as writer:
        n = 1
        while True:
            say(n)
            writer.commit(packed([NoteMade(n, "x" * 500, "Demo Winder")]))
            n += 1


def write_half(path: Path) -> None:
    """Commit twenty rows, then come to a standstill half way through writing a large commit to the file."""
    with open_book(path) as book, book.begin_coil("b1", 2026, started(1)) as writer:
        writer.commit(packed([NoteMade(n, "x" * 500, "Demo Winder") for n in range(20)]))
        book.close()  # the next connection is one of these:
        sqlite3.connect = Stuck  # type: ignore[assignment]  # stands in for the driver's function
        say("begun")
        writer.commit(packed([NoteMade(n, "y" * 3000, "Demo Winder") for n in range(200)]))
        say("never")


class Stuck(sqlite3.Connection):
    """Keeps so little in memory that changes go to the file at once, and never ends a commit."""

    def __init__(self, *arguments: object, **named: object) -> None:
        super().__init__(*arguments, **named)  # type: ignore[arg-type]  # handed on as they are
        self.execute("PRAGMA cache_size=1")

    def commit(self) -> None:
        if self.in_transaction:
            say("stuck")
            time.sleep(60)


def hold(path: Path) -> None:
    """Be the live writer of a new coil until the input ends."""
    with open_book(path) as book, book.begin_coil("b1", 2026, started(1)) as writer:
        writer.commit(packed(wound(writer.started, 2)))
        say(writer.number)
        sys.stdin.read()


def outgrow(path: Path) -> None:
    """Write to a disk without room, then again when there is some."""
    import resource  # not on every platform

    with open_book(path) as book, book.begin_coil("b1", 2026, started(1)) as writer:
        rows = packed([NoteMade(n, "z" * 5000, "Demo Winder") for n in range(60)])
        room = resource.getrlimit(resource.RLIMIT_FSIZE)
        resource.setrlimit(resource.RLIMIT_FSIZE, (path.stat().st_size + 50_000, room[1]))
        try:
            writer.commit(rows)
            say("committed")
        except BookError as error:
            say(error)
        resource.setrlimit(resource.RLIMIT_FSIZE, room)
        say(book.verify().broken)
        say(len(list(book.entries(coil_id(1)))))
        writer.commit(rows)
        say(book.verify().broken)
        say(len(list(book.entries(coil_id(1)))))


if __name__ == "__main__":
    tasks = {task.__name__: task for task in (number, write, write_half, hold, outgrow)}
    tasks[sys.argv[1]](Path(sys.argv[2]), *sys.argv[3:])
