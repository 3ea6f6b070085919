"""What a person does at a coil, typed at the terminal of a machine simulated in the command itself."""

from __future__ import annotations

import json
import time
from pathlib import Path

import pytest

from tests.cli import recipes
from tests.cli.processes import at_terminal
from windctl.book.open import open_book
from windctl.record.events import HandsAsked, NoteMade, Unwound


def test_enter_holds_words_are_explained_and_the_simulated_spindle_is_turned_back(tmp_path: Path) -> None:
    book = tmp_path / "shop.book"
    wind = ("wind", str(recipes.to_turns(tmp_path, 80)), "--machine", "virtual", "--speed", "4")
    with at_terminal(*wind, "--book", str(book), "--json") as session:
        session.shows("Enter holds the spindle")
        time.sleep(1.5)  # some ten turns
        session.types("\n")
        session.shows("Type go and Enter to go on")
        for typed, shown in (
            ("help", "splice [TURN]"),
            ("winde", "'winde' is not understood"),
            ("unwind 500", "500 turns cannot be taken off"),
            ("splice 70000", "turn 70 000 is outside this coil's 0 to"),
            ("off", "drives off, hands may go in: asked for at the keyboard"),
        ):
            session.types(f"{typed}\n")
            session.shows(shown)
        session.types("unwind 5\n")
        session.shows("Turn the spindle back")
        time.sleep(1.5)  # 5 turns at 5 turns a second of the machine's own time
        session.types("note Felt is new\n")
        session.shows("noted")
        session.types("go\n")
        coil = json.loads(session.ends(0))
    assert coil["turns"] == 80
    assert coil["plant"]["true_turns"] == pytest.approx(80, abs=0.01)
    with open_book(book) as opened:
        events = list(opened.events(coil["coil"]))
    (unwound,) = [event for event in events if isinstance(event, Unwound)]
    assert unwound.before - unwound.count == pytest.approx(5 * 400, abs=3)
    assert [event.text for event in events if isinstance(event, NoteMade)] == ["Felt is new"]
    assert len([event for event in events if isinstance(event, HandsAsked)]) == 2
