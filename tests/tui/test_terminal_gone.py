"""A terminal that vanishes without a word: the coil is held and recorded, and nothing stays behind."""

from __future__ import annotations

import sys
from pathlib import Path

import pytest

from tests.tui.terminal import standing, until, winding
from windctl.book.open import open_book
from windctl.record.events import HoldRequested

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
