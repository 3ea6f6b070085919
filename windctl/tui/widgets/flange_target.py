"""Where the guide stands to be looked at, and where the arrows move it."""

from __future__ import annotations

from windctl.tui.pictures.cells import Picture, blank
from windctl.tui.pictures.flanges import Flanges, flanges_picture
from windctl.tui.widgets.drawing import Drawing


class FlangeTarget(Drawing):
    """In the place of figures and curves while a dry pass goes on."""

    def __init__(self, *, id: str | None = None) -> None:
        super().__init__(id=id)
        self.seen: Flanges | None = None

    def show(self, seen: Flanges | None) -> None:
        """Show another place."""
        if seen != self.seen:
            self.seen = seen
            self.redraw()

    def drawn(self, width: int, height: int) -> Picture:
        """Nothing where nothing is to be looked at."""
        return blank(width, height) if self.seen is None else flanges_picture(width, height, self.seen)
