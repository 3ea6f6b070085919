"""What all rooms have in common: the top row with its mark, and the keys at the bottom."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

from textual.app import ComposeResult
from textual.screen import Screen
from textual.widget import Widget
from textual.widgets import Footer

from windctl.tui.widgets.title_bar import TitleBar

if TYPE_CHECKING:
    from windctl.tui.session import Session


class Room(Screen[None]):
    """`ABOUT` says what the room is for; `body` what stands between top and bottom."""

    ABOUT: ClassVar[str] = ""

    def __init__(self, session: Session) -> None:
        super().__init__()
        self.session = session

    def compose(self) -> ComposeResult:
        """Top row, body, keys."""
        yield self.top()
        yield from self.body()
        yield Footer(show_command_palette=False)

    def on_screen_suspend(self) -> None:
        """What was drawn is not kept: the library holds on to the lines of a thousand widgets gone by."""
        for widget in self.walk_children(Widget, with_self=True):
            widget.refresh()

    def top(self) -> TitleBar:
        """The top row."""
        return TitleBar(self.heading(), self.session.machine_words, self.session.simulated, id="title")

    def heading(self) -> str:
        """The words in the top row."""
        return "windctl"

    def body(self) -> ComposeResult:
        """What the room holds."""
        yield from ()
