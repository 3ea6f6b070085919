"""Coils against the first of them."""

from __future__ import annotations

from collections.abc import Sequence

from windctl.tui.pictures.against import Other, against_picture
from windctl.tui.pictures.cells import Picture, blank
from windctl.tui.pictures.curve import Point
from windctl.tui.widgets.drawing import Drawing


class Against(Drawing):
    """Empty until there is another coil."""

    def __init__(self, *, id: str | None = None) -> None:
        super().__init__(id=id)
        self._first: Sequence[Point] = ()
        self.others: tuple[Other, ...] = ()

    def show(self, first: Sequence[Point], others: tuple[Other, ...]) -> None:
        """Show other coils."""
        self._first, self.others = first, others
        self.redraw()

    def drawn(self, width: int, height: int) -> Picture:
        """The differences."""
        if not self.others or width < 24 or height < 4:
            return blank(width, height)
        return against_picture(width, height, self._first, self.others)
