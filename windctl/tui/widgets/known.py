"""What is known of a wire beside the table."""

from __future__ import annotations

from windctl.tui.pictures.cells import Picture, blank
from windctl.tui.pictures.known import known_picture
from windctl.tui.widgets.drawing import Drawing


class Known(Drawing):
    """Three rows, empty without a spool."""

    DEFAULT_CSS = "Known { height: 3; }"

    def __init__(self, *, id: str | None = None) -> None:
        super().__init__(id=id)
        self.parts: tuple[float, float, float] | None = None

    def show(self, parts: tuple[float, float, float] | None) -> None:
        """Show another wire."""
        if parts != self.parts:
            self.parts = parts
            self.redraw()

    def drawn(self, width: int, height: int) -> Picture:
        """The two intervals."""
        return blank(width, height) if self.parts is None else known_picture(width, height, *self.parts)
