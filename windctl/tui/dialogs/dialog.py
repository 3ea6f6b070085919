"""What all questions have in common."""

from __future__ import annotations

from typing import ClassVar, Generic, TypeVar

from textual.app import ComposeResult
from textual.binding import BindingType
from textual.containers import VerticalScroll
from textual.screen import ModalScreen
from textual.widget import Widget
from textual.widgets import Static

from windctl.tui.drawn import forget_drawn
from windctl.tui.keymap import key

Answer = TypeVar("Answer")


class Dialog(ModalScreen[Answer], Generic[Answer]):
    """A box with a heading and words, never parsed as markup. Escape gives no answer."""

    BINDINGS: ClassVar[list[BindingType]] = [key("back")]

    def __init__(self, heading: str, words: str) -> None:
        super().__init__()
        self.heading, self.words = heading, words

    def compose(self) -> ComposeResult:
        """Heading, words, whatever a kind of question adds, and how to answer."""
        with VerticalScroll(classes="dialog", can_focus=False):
            yield Static(self.heading, classes="heading", markup=False)
            yield Static(self.words, classes="words", markup=False)
            yield from self.body()
            yield Static(self.how(), classes="how", markup=False)

    def on_screen_suspend(self) -> None:
        """What was drawn is not kept."""
        forget_drawn(self)

    def body(self) -> list[Widget]:
        """What stands below the words."""
        return []

    def how(self) -> str:
        """How to answer."""
        return "Esc closes"

    def action_back(self) -> None:
        """No answer."""
        self.dismiss(None)
