"""What the tests run in processes of their own: `python -m tests.book.child TASK BOOK [ARGUMENTS]`."""

from __future__ import annotations

import shutil
import sqlite3
import sys
import time
from pathlib import Path

from tests.book.samples import ENDED, coil_id, finished, packed, seal, started, wind, wound
from windctl.book.exchange import Hand, coil_of, coils_in
from windctl.book.open import open_book
from windctl.errors import BookError
from windctl.record.addenda import CoilMeasured, CoilNoted
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


def shift(path: Path, first: str, n: str) -> None:
    """Wind, seal, measure and note `n` coils, each as a run and a person do; say their numbers."""
    with open_book(path, wait_s=60.0) as book:
        say("ready")
        sys.stdin.readline()
        for k in range(int(first), int(first) + int(n)):
            writer = book.begin_coil("b1", 2026, started(k, spool="s1"))
            for row in packed([*wound(writer.started, 2), finished(2)]):
                writer.commit([row])
            seal(book, writer)
            book.amend(writer.id, CoilMeasured(ENDED, "Demo Winder", grams=1.0 + k, grams_sd=0.02))
            latest = next(head for head in book.list(limit=3) if head.sealed)  # perhaps the other one's
            book.amend(latest.id, CoilNoted(ENDED, "Demo Winder", f"seen by {first}"))
            say(writer.number)


def wind_on(path: Path) -> None:
    """Wind and seal one coil after the other without end."""
    with open_book(path) as book:
        say("ready")
        n = 1
        while True:
            wind(book, n, turns=1)
            n += 1


def migrate(path: Path, old: str) -> None:
    """Put the older book `old` in place and take it forward, over and over."""
    half = path.with_name("half")
    say("ready")
    while True:
        shutil.copyfile(old, half)
        half.replace(path)
        open_book(path, create=False).close()
        for backup in path.parent.glob("*.before-*"):
            backup.unlink()


def take_in(path: Path, file: str) -> None:
    """Import a file of coils."""
    with open_book(path) as book:
        say("ready")
        for text in coils_in(Path(file))[1]:
            book.take_in(coil_of(text), Hand(ENDED, "Demo Winder", False))
    say("done")
    time.sleep(60)


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
    every = (number, write, write_half, hold, outgrow, shift, wind_on, migrate, take_in)
    tasks = {task.__name__: task for task in every}
    tasks[sys.argv[1]](Path(sys.argv[2]), *sys.argv[3:])
