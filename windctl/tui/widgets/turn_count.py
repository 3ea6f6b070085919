"""The turn count, to be read from across the room."""

from __future__ import annotations

from windctl.tui.pictures.cells import Picture, blank, put
from windctl.tui.pictures.digits import big_digits
from windctl.tui.widgets.drawing import Drawing


class TurnCount(Drawing):
    """Digits as high as the widget."""

    def __init__(self, *, id: str | None = None) -> None:
        super().__init__(id=id)
        self.digits = "0"

    def show(self, digits: str) -> None:
        """Show other digits."""
        if digits != self.digits:
            self.digits = digits
            self.redraw()

    def drawn(self, width: int, height: int) -> Picture:
        """The digits, set to the left."""
        picture = blank(width, height)
        for row, line in enumerate(big_digits(self.digits, height, width)):
            put(picture, row, 0, line, "digits")
        return picture
