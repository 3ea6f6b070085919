"""What the rooms between coils have in common: the ways to the others, and back."""

from __future__ import annotations

from typing import ClassVar

from textual.binding import BindingType

from windctl.tui.keymap import key
from windctl.tui.screens.room import Room
from windctl.tui.widgets.room_bar import ROOMS, RoomBar
from windctl.tui.widgets.table import Table
from windctl.tui.widgets.title_bar import TitleBar


def ways() -> list[BindingType]:
    """The keys of the rooms: the top row shows them."""
    return [key(name, show=False) for name in ROOMS]


class Between(Room):
    """Escape goes back. `HERE` is the id of the room's key."""

    HERE: ClassVar[str] = "coils"
    BINDINGS: ClassVar[list[BindingType]] = [key("back", show=False), *ways()]

    def top(self) -> TitleBar:
        """The rooms, with this one lit."""
        return RoomBar(self.HERE, self.session.machine_words, self.session.simulated, id="title")

    def on_mount(self) -> None:
        """Colours in tables are painted anew when the theme changes."""
        self.watch(self.app, "theme", self.repaint, init=False)

    def on_screen_resume(self) -> None:
        """Another machine may have been taken meanwhile."""
        bar = self.query_one(TitleBar)
        bar.machine = self.session.machine_words
        bar.simulated = self.session.simulated
        bar.redraw()

    def on_resize(self) -> None:
        """A table has other columns where there is more room or less."""
        for table in self.query(Table):
            if table.row_count:
                self.call_after_refresh(self.repaint)

    def repaint(self) -> None:
        """Other colours, or another width."""

    def action_back(self) -> None:
        """Where one came from."""
        self.app.pop_screen()
