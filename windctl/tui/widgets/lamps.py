"""Inputs and sensors, one a row: name, glyph and word in their colour, figure."""

from __future__ import annotations

from typing import TYPE_CHECKING

from windctl.tui.pictures.cells import Picture, blank, put
from windctl.tui.widgets.drawing import Drawing

if TYPE_CHECKING:
    from windctl.tui.machine_view import Lamp

_STATE, _FIGURE = 11, 24  # columns


class Lamps(Drawing):
    """As many as there are rows."""

    def __init__(self, *, id: str | None = None) -> None:
        super().__init__(id=id)
        self.lamps: tuple[Lamp, ...] = ()

    def show(self, lamps: tuple[Lamp, ...]) -> None:
        """Show other states."""
        if lamps != self.lamps:
            self.lamps = lamps
            self.redraw()

    def drawn(self, width: int, height: int) -> Picture:
        """The rows."""
        picture = blank(width, height)
        for row, lamp in enumerate(self.lamps[:height]):
            put(picture, row, 0, lamp.name, "label")
            put(picture, row, _STATE, f"{lamp.look.glyph} {lamp.look.word}", lamp.look.role)
            put(picture, row, _FIGURE, lamp.figure, "digits")
        return picture
