"""How the bobbin sits and which way it turns."""

from __future__ import annotations

from windctl.recipe.orientation import Orientation
from windctl.tui.pictures.bobbin import bobbin_picture
from windctl.tui.pictures.cells import Picture
from windctl.tui.widgets.drawing import Drawing


class OrientationDrawing(Drawing):
    """Two views of the mounted bobbin."""

    def __init__(self, where: Orientation, face_out: bool, *, id: str | None = None) -> None:
        super().__init__(id=id)
        self._where, self._face_out = where, face_out

    def drawn(self, width: int, height: int) -> Picture:
        """The same at any size; what does not fit is cut."""
        return [row[:width] for row in bobbin_picture(self._where, self._face_out)[:height]]
