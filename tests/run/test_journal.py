"""The journal thread: order, durability, and what a failing disk does."""

from __future__ import annotations

import threading
from collections.abc import Sequence

import pytest

from windctl.errors import BookError
from windctl.record.entries import Entry
from windctl.run.journal import Journal


class Shelf:
    """A log in memory whose commits can be held up or made to fail."""

    def __init__(self) -> None:
        self.entries: list[Entry] = []
        self.commits = 0
        self.closed = False
        self.gate = threading.Event()
        self.gate.set()
        self.error: Exception | None = None
        self.began = threading.Event()

    def commit(self, entries: Sequence[Entry]) -> None:
        self.began.set()
        self.gate.wait(10)
        if self.error is not None:
            raise self.error
        self.entries.extend(entries)
        self.commits += 1

    def close(self) -> None:
        self.closed = True


def entry(n: int) -> Entry:
    return Entry("note_made", str(n).encode(), 1)


def test_entries_become_durable_in_order() -> None:
    shelf = Shelf()
    journal = Journal(shelf, linger_s=0.0)
    for n in range(200):
        ticket = journal.put([entry(n)], urgent=n % 7 == 0)
    assert journal.wait(ticket, 10)
    assert shelf.entries == [entry(n) for n in range(200)]
    journal.close()
    assert shelf.closed and journal.waiting == 0


def test_a_consent_is_not_durable_before_its_commit_returned() -> None:
    shelf = Shelf()
    shelf.gate.clear()
    journal = Journal(shelf, linger_s=60.0)
    ticket = journal.put([entry(1)], urgent=True)
    assert shelf.began.wait(10)
    assert not journal.is_durable(ticket)
    assert not journal.wait(ticket, 0.02)
    assert journal.oldest_s() > 0.0
    shelf.gate.set()
    assert journal.wait(ticket, 10) and journal.oldest_s() == 0.0
    journal.close()


def test_what_gathers_is_committed_together() -> None:
    shelf = Shelf()
    journal = Journal(shelf, linger_s=5.0)
    for n in range(50):
        journal.put([entry(n)], urgent=False)
    assert journal.wait(50, 10)  # somebody waits: no lingering
    assert shelf.commits == 1
    journal.close()


def test_a_failed_commit_is_seen_and_ends_the_journal() -> None:
    shelf = Shelf()
    shelf.error = BookError("no space left on the disk")
    journal = Journal(shelf, linger_s=0.0)
    ticket = journal.put([entry(1)], urgent=True)
    assert not journal.wait(ticket, 10)
    assert journal.failure is shelf.error and not journal.is_durable(ticket)
    with pytest.raises(BookError, match="no space"):
        journal.close()
    assert shelf.closed


def test_an_unexpected_error_is_a_failed_journal_too() -> None:
    shelf = Shelf()
    shelf.error = RuntimeError("surprise")
    journal = Journal(shelf, linger_s=0.0)
    journal.wait(journal.put([entry(1)], urgent=True), 10)
    with pytest.raises(BookError, match="surprise"):
        journal.close()


def test_closing_commits_what_is_left() -> None:
    shelf = Shelf()
    journal = Journal(shelf, linger_s=60.0)
    journal.put([entry(1), entry(2)], urgent=False)
    journal.close()
    assert shelf.entries == [entry(1), entry(2)]


def test_what_a_failed_commit_left_is_tried_once_more_on_closing() -> None:
    shelf = Shelf()
    shelf.error = BookError("locked")
    journal = Journal(shelf, linger_s=0.0)
    journal.wait(journal.put([entry(1)], urgent=True), 10)
    assert journal.failure is shelf.error
    journal.put([entry(2), entry(3)], urgent=True)  # why it was held
    shelf.error = None
    journal.close()
    assert shelf.entries == [entry(1), entry(2), entry(3)]
    assert journal.waiting == 0 and shelf.closed


def test_a_thread_that_is_torn_down_is_a_failed_journal_not_a_silent_one() -> None:
    shelf = Shelf()
    shelf.error = SystemExit()  # type: ignore[assignment]  # no Exception: what ends a thread without a word
    journal = Journal(shelf, linger_s=0.0)
    journal.wait(journal.put([entry(1)], urgent=True), 10)
    assert isinstance(journal.failure, BookError)
    shelf.error = None
    journal.close()
    assert shelf.entries == [entry(1)]


def test_time_in_which_this_process_stood_still_makes_no_fact_older() -> None:
    shelf = Shelf()
    shelf.gate.clear()
    journal = Journal(shelf, linger_s=0.0)
    journal.put([entry(1)], urgent=True)
    assert shelf.began.wait(10)
    journal.put([entry(2)], urgent=True)
    before = journal.oldest_s()
    journal.paused(100.0)
    assert journal.oldest_s() <= before - 99.0
    shelf.gate.set()
    journal.close()
