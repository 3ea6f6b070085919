"""What the rooms between coils have in common: the ways to the others, and back."""

from __future__ import annotations

from textual.binding import BindingType

from windctl.tui.keymap import key
from windctl.tui.screens.room import Room


def ways(here: str = "") -> list[BindingType]:
    """The keys of the rooms, to stand behind a room's own; that of the room itself is not shown."""
    rooms = [key(name, show=name != here) for name in ("recipes", "coils", "spools", "machine")]
    return [*rooms, key("back", show=False)]


class Between(Room):
    """Escape goes back. `BINDINGS` of a room end with `ways`."""

    def on_mount(self) -> None:
        """Colours in tables are painted anew when the theme changes."""
        self.watch(self.app, "theme", self.repaint, init=False)

    def repaint(self) -> None:
        """Other colours."""

    def action_back(self) -> None:
        """Where one came from."""
        self.app.pop_screen()
