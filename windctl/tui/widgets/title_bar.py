"""The top row: what is on the bench, and a mark that never leaves while the machine is simulated."""

from __future__ import annotations

from windctl.tui.pictures.cells import Picture, blank, put
from windctl.tui.widgets.drawing import Drawing

MARK = "◆ SIMULATED"


class TitleBar(Drawing):
    """One row: title on the left, machine on the right."""

    DEFAULT_CSS = "TitleBar { height: 1; dock: top; background: $panel; }"

    def __init__(self, title: str, machine: str, simulated: bool, *, id: str | None = None) -> None:
        super().__init__(id=id)
        self.title, self.machine, self.simulated = title, machine, simulated

    def show(self, title: str, simulated: bool) -> None:
        """Show another title."""
        if (title, simulated) != (self.title, self.simulated):
            self.title, self.simulated = title, simulated
            self.redraw()

    def drawn(self, width: int, height: int) -> Picture:
        """The mark has its room first, then the title, then the machine."""
        picture = blank(width, height)
        mark = f" {MARK} " if self.simulated else ""
        put(picture, 0, 1, self.title[: max(0, width - len(mark) - 2)], "digits")
        right = width - len(mark)
        put(picture, 0, right, mark, "unsure")
        left = right - len(self.machine) - 2
        if left > len(self.title) + 3:
            put(picture, 0, left, self.machine, "label")
        return picture
