"""What all rooms have in common: the top row with its mark, and the keys at the bottom."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

from textual.app import ComposeResult
from textual.screen import Screen

from windctl.tui.drawn import forget_drawn
from windctl.tui.widgets.key_bar import KeyBar
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
        yield KeyBar()

    def on_screen_suspend(self) -> None:
        """What was drawn is not kept."""
        forget_drawn(self)

    def top(self) -> TitleBar:
        """The top row."""
        return TitleBar(self.heading(), self.session.machine_words, self.session.simulated, id="title")

    def heading(self) -> str:
        """The words in the top row."""
        return "windctl"

    def body(self) -> ComposeResult:
        """What the room holds."""
        yield from ()
