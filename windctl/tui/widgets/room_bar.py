"""The top row between coils: the rooms with their keys, the present one lit, the machine, and the mark."""

from __future__ import annotations

from windctl.tui.pictures.cells import Picture, blank, put
from windctl.tui.widgets.title_bar import MARK, TitleBar

ROOMS = {"recipes": "Recipes", "coils": "Coils", "spools": "Spools", "machine": "Machine"}  # by key's id


class RoomBar(TitleBar):
    """One row. `here` is the id of the present room's key."""

    DEFAULT_CSS = "RoomBar { height: 1; dock: top; background: $panel; }"

    def __init__(self, here: str, machine: str, simulated: bool, *, id: str | None = None) -> None:
        super().__init__(ROOMS[here], machine, simulated, id=id)
        self.here = here

    def on_mount(self) -> None:
        """The keys are known once the screen is there."""
        self.call_after_refresh(self.redraw)

    def drawn(self, width: int, height: int) -> Picture:
        """The mark has its room first, then the rooms, then the machine."""
        picture = blank(width, height)
        mark = f" {MARK} " if self.simulated else ""
        put(picture, 0, width - len(mark), mark, "unsure")
        keys = {
            active.binding.id: self.app.get_key_display(active.binding)
            for active in self.screen.active_bindings.values()
        }
        column = 0
        for name, words in ROOMS.items():
            here = name == self.here
            put(picture, 0, column, "▌" if here else " ", "past")
            put(picture, 0, column + 1, words, "digits" if here else "label")
            column += len(words) + 2
            key = keys.get(name, "").upper()
            put(picture, 0, column, key, "past" if here else "axis")
            column += len(key) + 2
        left = width - len(mark) - len(self.machine) - 1
        if left > column:
            put(picture, 0, left, self.machine, "label")
        return picture
