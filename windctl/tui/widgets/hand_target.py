"""Where the hand should be, for a machine whose wire is guided by hand."""

from __future__ import annotations

from typing import TYPE_CHECKING

from windctl.tui.pictures.cells import Picture, blank
from windctl.tui.pictures.hand import HEIGHT, hand_picture
from windctl.tui.widgets.drawing import Drawing

if TYPE_CHECKING:
    from windctl.plan.by_hand import HandLay


class HandTarget(Drawing):
    """The target and the countdown; nothing where a motor guides."""

    DEFAULT_CSS = f"HandTarget {{ height: {HEIGHT}; display: none; }} HandTarget.-there {{ display: block; }}"

    def __init__(self, lay: HandLay | None, *, id: str | None = None) -> None:
        super().__init__(id=id, classes="-there" if lay is not None else "")
        self._lay = lay
        self.turn = 0.0
        self.turning = False

    def show(self, turn: float, turning: bool) -> None:
        """Show another turn."""
        if self._lay is not None and (turn, turning) != (self.turn, self.turning):
            self.turn, self.turning = turn, turning
            self.redraw()

    def drawn(self, width: int, height: int) -> Picture:
        """The bar over the gap."""
        if self._lay is None:
            return blank(width, height)
        return hand_picture(width, height, self._lay, self.turn, self.turning)
