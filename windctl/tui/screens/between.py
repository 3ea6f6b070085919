"""What the rooms between coils have in common: the ways to the others, and back."""

from __future__ import annotations

from typing import ClassVar

from textual.binding import BindingType

from windctl.tui.keymap import key
from windctl.tui.screens.room import Room


class Between(Room):
    """Escape goes back; the keys of the rooms are shown."""

    BINDINGS: ClassVar[list[BindingType]] = [
        key("recipes"),
        key("coils"),
        key("spools"),
        key("back", show=False),
    ]

    def on_mount(self) -> None:
        """Colours in tables are painted anew when the theme changes."""
        self.watch(self.app, "theme", self.repaint, init=False)

    def repaint(self) -> None:
        """Other colours."""

    def action_back(self) -> None:
        """Where one came from."""
        self.app.pop_screen()
