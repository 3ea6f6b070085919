"""A terminal that vanishes without a word: the coil is held and recorded, and nothing stays behind."""

from __future__ import annotations

import sys
import threading
from pathlib import Path

import pytest

from tests.tui.terminal import standing, until, winding
from windctl.book.open import open_book
from windctl.record.events import HoldRequested
from windctl.tui import start

pytestmark = pytest.mark.skipif(sys.platform == "win32", reason="platform: no pseudo-terminals")


def test_a_terminal_that_sends_no_signal_when_it_goes_ends_the_program_all_the_same(tmp_path: Path) -> None:
    with winding(tmp_path, status_per_s=20.0) as (terminal, line):
        terminal.vanish()
        until(lambda: standing(line), 20.0, "it turns on with nobody to see it")
        assert terminal.process.wait(30) == 130
    with open_book(tmp_path / "a.book", create=False, readonly=True) as book:
        (head,) = book.list()
        holds = [event for event in book.events(head.number) if isinstance(event, HoldRequested)]
        assert [hold.reason for hold in holds] == ["the terminal is gone"]
        assert head.outcome == "open"
        assert book.verify().broken == ()


def test_an_interface_stuck_in_writing_to_what_is_gone_is_ended_once_the_record_is_complete(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """The library's thread that writes ends with the terminal, and its loop then waits for it for good."""
    order: list[str] = []
    ended, stuck = threading.Event(), threading.Event()

    class Left:
        def leave(self, _reason: str) -> None:
            order.append("left")

        def hold(self, _reason: str, *, leave: bool) -> None:
            order.append("held")

    class Stuck:
        def call_from_thread(self, *_what: object) -> None:
            stuck.wait(30.0)

        def exit(self, _code: int) -> None: ...

    def end() -> None:
        order.append("ended")
        ended.set()

    monkeypatch.setattr(start, "_end", end)
    monkeypatch.setattr(start, "_GRACE_S", 0.05)
    monkeypatch.setattr(start, "_watch_terminal", lambda gone: gone())
    with start._signals(Left(), Stuck(), threading.Event()):  # type: ignore[arg-type]  # what it needs of them
        assert ended.wait(20.0)
    stuck.set()
    assert order == ["held", "left", "ended"]
