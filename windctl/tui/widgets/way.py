"""How far the coil is on its way to the stop, with the place where it slows."""

from __future__ import annotations

from windctl.tui.pictures.cells import Picture, blank, put
from windctl.tui.widgets.drawing import Drawing

_PARTS = "▏▎▍▌▋▊▉█"


class Way(Drawing):
    """One row."""

    DEFAULT_CSS = "Way { height: 1; }"

    def __init__(self, *, id: str | None = None) -> None:
        super().__init__(id=id)
        self.part = 0.0
        self.slow_part: float | None = None

    def show(self, part: float, slow_part: float | None) -> None:
        """Show another place."""
        if (part, slow_part) != (self.part, self.slow_part):
            self.part, self.slow_part = part, slow_part
            self.redraw()

    def drawn(self, width: int, height: int) -> Picture:
        """Full cells, the last in eighths, then the way that is left."""
        picture = blank(width, height)
        eighths = round(max(0.0, min(1.0, self.part)) * width * 8)
        full, rest = divmod(eighths, 8)
        put(picture, 0, 0, "─" * width, "axis")
        if self.slow_part is not None:
            put(picture, 0, min(width - 1, int(self.slow_part * width)), "╂", "label")
        put(picture, 0, 0, "█" * full + (_PARTS[rest - 1] if rest else ""), "past")
        return picture
