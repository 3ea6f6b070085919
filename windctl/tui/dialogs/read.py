"""A reading by hand: what to do, in order, and a line for what the meter shows."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from textual.widget import Widget
from textual.widgets import Input, Static

from windctl.desk.words import request_of
from windctl.run.requests import Read, Request, Skip
from windctl.tui.dialogs.typed import Typed
from windctl.tui.view import reading_steps

if TYPE_CHECKING:
    from windctl.run.snapshot import Snapshot

_NOT_UNDERSTOOD = "Type what the meter shows, such as 5930, 5.93k or 5,93k, then how warm it is: 5.93k 22.5"


class ReadingPrompt(Typed):
    """Stays until a reading was taken or passed over; what the run answers is shown in it."""

    def __init__(self, snapshot: Snapshot, ask: Callable[[Request], None]) -> None:
        turn = snapshot.turns if snapshot.check is None else snapshot.check.turn
        super().__init__(f"Read the resistance at turn {turn:.0f}", reading_steps(snapshot), "5.93k 22.5")
        self._ask = ask

    def body(self) -> list[Widget]:
        """The line, and the answer to it."""
        return [*super().body(), Static("", id="reading-answer", markup=False)]

    def how(self) -> str:
        """How to answer."""
        return "Enter takes it   skip passes it over   Esc closes, R opens it again"

    def look(self, snapshot: Snapshot) -> None:
        """The steps as far as they have come."""
        steps = reading_steps(snapshot)
        for words in self.query(".words").results(Static):  # none before it is laid out
            if str(words.content) != steps:
                words.update(steps)

    def tell(self, words: str) -> None:
        """What the run says to what was typed."""
        for answer in self.query("#reading-answer").results(Static):
            answer.update(words)

    def take(self, line: str) -> None:
        """On to the run; the question stays."""
        wanted = request_of(line) if line.lower().startswith(("read", "skip")) else request_of(f"read {line}")
        if isinstance(wanted, Read | Skip):
            self.tell("")
            self._ask(wanted)
        elif line:
            self.tell(_NOT_UNDERSTOOD)
        self.query_one(Input).value = ""
