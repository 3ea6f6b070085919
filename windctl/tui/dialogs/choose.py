"""One of several."""

from __future__ import annotations

from collections.abc import Sequence

from textual import on
from textual.widget import Widget
from textual.widgets import OptionList
from textual.widgets.option_list import Option

from windctl.tui.dialogs.dialog import Dialog


class Choose(Dialog[str]):
    """The key of the line that was taken. `lines`: (key, words)."""

    def __init__(self, heading: str, words: str, lines: Sequence[tuple[str, str]], now: str = "") -> None:
        super().__init__(heading, words)
        self._lines = tuple(lines)
        self._now = now

    def body(self) -> list[Widget]:
        """The lines; the one that counts now is marked."""
        options = [Option(f"{'▶' if key == self._now else ' '} {words}") for key, words in self._lines]
        return [OptionList(*options, markup=False)]

    def on_mount(self) -> None:
        """Begin at the one that counts now."""
        options = self.query_one(OptionList)
        keys = [key for key, _ in self._lines]
        options.highlighted = keys.index(self._now) if self._now in keys else 0
        options.focus()

    def how(self) -> str:
        """How to answer."""
        return "Enter takes it   Esc leaves it"

    @on(OptionList.OptionSelected)
    def taken(self, event: OptionList.OptionSelected) -> None:
        """The answer."""
        self.dismiss(self._lines[event.option_index][0])
