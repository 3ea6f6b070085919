"""A line that is typed: a word that gives consent, a note, a figure."""

from __future__ import annotations

from textual import on
from textual.widget import Widget
from textual.widgets import Input

from windctl.desk.words import number
from windctl.tui.dialogs.dialog import Dialog


class Typed(Dialog[str]):
    """The line typed, without blanks around it; None if nothing was."""

    def __init__(self, heading: str, words: str, placeholder: str = "") -> None:
        super().__init__(heading, words)
        self._placeholder = placeholder
        self._early = ""

    def body(self) -> list[Widget]:
        """The line."""
        return [Input(placeholder=self._placeholder)]

    def on_mount(self) -> None:
        """Type at once."""
        line = self.query_one(Input)
        line.focus()
        line.value = self._early
        self.call_after_refresh(self._behind_it)

    def more(self, typed: str) -> None:
        """What was typed before this was laid out, and went to the screen below."""
        self._early += typed
        for line in self.query(Input):
            line.value += typed
            self._behind_it()

    def _behind_it(self) -> None:
        """Focus selects what stands there, and the next letter would take its place."""
        line = self.query_one(Input)
        line.cursor_position = len(line.value)

    def how(self) -> str:
        """How to answer."""
        return "Enter takes it   Esc leaves it"

    @on(Input.Submitted)
    def submitted(self, event: Input.Submitted) -> None:
        """Enter."""
        event.stop()
        self.take(event.value.strip())

    def take(self, line: str) -> None:
        """The answer, if it will do."""
        if line and self.will_do(line):
            self.dismiss(line)
        else:
            self.query_one(Input).value = ""

    def will_do(self, line: str) -> bool:
        """Whether this line is an answer; any that is not empty."""
        return bool(line)


class Word(Typed):
    """One certain word, and no other: consent that nobody gives by leaning on a key."""

    def __init__(self, heading: str, words: str, word: str) -> None:
        super().__init__(heading, words, f"type {word}")
        self._word = word

    def will_do(self, line: str) -> bool:
        """Only the word."""
        return line.lower() == self._word


class Figure(Typed):
    """A number, with either decimal sign."""

    def will_do(self, line: str) -> bool:
        """Only a number."""
        return number(line) is not None
