"""The curve of resistance, and the closer look at its finish."""

from __future__ import annotations

from collections.abc import Sequence

from windctl.tui.pictures.cells import Picture, blank
from windctl.tui.pictures.curve import Band, Point, Scale, curve_picture, finish_picture
from windctl.tui.widgets.drawing import Drawing


class Curve(Drawing):
    """Draws what it is given on axes that never move. `closer`: the finish alone, in per cent."""

    def __init__(self, *, closer: bool = False, id: str | None = None) -> None:
        super().__init__(id=id)
        self.closer = closer
        self._scale: Scale | None = None
        self._past: Sequence[Point] = ()
        self._fan: Sequence[Band] = ()

    def show(self, scale: Scale, past: Sequence[Point], fan: Sequence[Band]) -> None:
        """Show other points."""
        self._scale, self._past, self._fan = scale, past, fan
        self.redraw()

    def drawn(self, width: int, height: int) -> Picture:
        """The whole or the closer look."""
        if self._scale is None or width < 12 or height < 3:
            return blank(width, height)
        if self.closer:
            end = self._fan[-1].turn if self._fan else self._scale.turns
            return finish_picture(width, height, self._scale, self._past, end)
        return curve_picture(width, height, self._scale, self._past, self._fan)
