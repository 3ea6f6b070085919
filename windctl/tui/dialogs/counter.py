"""What the counter says, where nobody else counts."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from textual.widget import Widget
from textual.widgets import Input, Static

from windctl.desk.numbers import grouped
from windctl.desk.words import BY, turns_of
from windctl.run.requests import CountIs, Request
from windctl.tui.dialogs.typed import Typed

if TYPE_CHECKING:
    from windctl.run.snapshot import Snapshot

_NOT_UNDERSTOOD = "Type whole turns, such as 3200, 3 200 or 3.2k"


class CounterPrompt(Typed):
    """Stays while what was typed is asked about; the same number once more is then believed. `first`: the
    digit by which it was opened."""

    def __init__(self, snapshot: Snapshot, ask: Callable[[Request], None], first: str = "") -> None:
        words = f"{snapshot.says}.\nType what it says with the spindle standing, such as 3200, 3 200 or 3.2k."
        super().__init__("Counter?", words, grouped(snapshot.stop_turn or snapshot.turns_planned))
        self._ask = ask
        self._early = first

    def body(self) -> list[Widget]:
        """The line, and what the run says to it."""
        return [*super().body(), Static("", id="counter-answer", markup=False)]

    def tell(self, words: str) -> None:
        """Why it is asked about."""
        for answer in self.query("#counter-answer").results(Static):  # none before it is laid out
            answer.update(words)

    def take(self, line: str) -> None:
        """On to the run; it says whether that can be."""
        turn = turns_of(line)
        if turn is not None:
            self.tell("")
            self._ask(CountIs(BY, turn))
        elif line:
            self.tell(_NOT_UNDERSTOOD)
        self.query_one(Input).value = ""
