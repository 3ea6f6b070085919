"""However the book fails at the end of a run: what is known of the spindle is told, nothing is made up."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from pathlib import Path

import pytest

from tests.run.test_accidents import RECIPE, TURNS
from tests.run.winding import here, order
from windctl.book.open import open_book
from windctl.book.writer import CoilWriter
from windctl.errors import BookError, LinkLost
from windctl.machine.virtual.bench import virtual_bench
from windctl.machine.virtual.port import VirtualPort
from windctl.profile.builtin import VIRTUAL
from windctl.record.entries import Entry
from windctl.record.events import Event
from windctl.run.outcome import Outcome
from windctl.run.wind import Winding, begin, go_on

Before = Callable[[Winding, VirtualPort], None]


def wound(book: Path, before_closing: Before = lambda winding, port: None) -> Outcome:
    """A short coil; something may happen between its end and its closing."""
    recipe, wanted = order(RECIPE)
    port = VirtualPort(virtual_bench(recipe, VIRTUAL, 1))
    with open_book(book) as opened:
        winding = begin(wanted, opened, port, here())
        winding.start()
        before_closing(winding, port)
        assert winding.wait(60.0) is not None
        return winding.close()


def taken_up(book: Path) -> Outcome:
    """The same coil, gone on with."""
    recipe, _ = order(RECIPE)
    with open_book(book) as opened:
        (head,) = opened.open_coils()
        winding = go_on(head.number, opened, VirtualPort(virtual_bench(recipe, VIRTUAL, 1)), here(2))
        winding.start()
        assert winding.wait(60.0) is not None
        return winding.close()


@pytest.fixture
def finish_cannot_be_written(monkeypatch: pytest.MonkeyPatch) -> Iterator[list[bool]]:
    """The coil's end does not reach the disk, as long as the list holds something."""
    commit, broken = CoilWriter.commit, [True]

    def refusing(self: CoilWriter, entries: Sequence[Entry]) -> None:
        if broken and any(entry.kind == "coil_finished" for entry in entries):
            raise BookError("the disk is full")
        commit(self, entries)

    monkeypatch.setattr(CoilWriter, "commit", refusing)
    yield broken


def test_an_end_that_was_not_recorded_is_no_end(tmp_path: Path, finish_cannot_be_written: list[bool]) -> None:
    book = tmp_path / "coils.book"
    outcome = wound(book)
    assert outcome.left == "failed" and outcome.why == "the disk is full"
    assert outcome.summary.outcome == "open"
    assert isinstance(outcome.error, BookError)
    finish_cannot_be_written.clear()
    with open_book(book) as opened:
        assert opened.verify().broken == ()
    again = taken_up(book)
    assert again.left == "turn wanted"  # this simulated board is another one; a real one would go on


def test_an_end_that_could_not_be_sealed_is_sealed_by_going_on(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def refusing(self: CoilWriter, *_: object, **__: object) -> None:
        raise BookError("the disk is full")

    book = tmp_path / "coils.book"
    with monkeypatch.context() as patch:
        patch.setattr(CoilWriter, "seal", refusing)
        outcome = wound(book)
    assert (outcome.left, outcome.why, outcome.record_digest) == ("failed", "the disk is full", "")
    assert outcome.as_json()["record_digest"] is None
    sealed = taken_up(book)
    assert sealed.left == "finished" and sealed.summary.turns == TURNS
    with open_book(book) as opened:
        assert opened.open_coils() == ()
        assert opened.verify().broken == ()


def test_a_book_that_cannot_be_read_does_not_hide_that_the_stop_is_unconfirmed(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    from windctl.book.book import Book

    def unreadable(self: Book, coil: str) -> Iterator[Event]:
        raise BookError("the disk failed")

    def pull_the_plug(winding: Winding, port: VirtualPort) -> None:
        while winding.look().turns < 10.0:
            assert winding.wait(0.001) is None
        port.unplug()
        monkeypatch.setattr(Book, "events", unreadable)

    outcome = wound(tmp_path / "coils.book", pull_the_plug)
    assert outcome.left == "unconfirmed"
    assert isinstance(outcome.error, LinkLost)
    assert outcome.summary.outcome == "open"
