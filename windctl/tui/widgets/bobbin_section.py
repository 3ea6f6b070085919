"""The section through the bobbin, filling."""

from __future__ import annotations

from typing import TYPE_CHECKING

from windctl.tui.pictures.cells import Picture, blank, put
from windctl.tui.pictures.section import Filled, Section
from windctl.tui.widgets.drawing import Drawing

if TYPE_CHECKING:
    from windctl.plan.growth import Growth


class BobbinSection(Drawing):
    """The gap between the flanges; what the coil will be lies pale behind what it is."""

    def __init__(self, *, id: str | None = None) -> None:
        super().__init__(id=id)
        self._growth: Growth | None = None
        self._section: Section | None = None
        self.filled = Filled(0.0)

    def show(self, growth: Growth | None, filled: Filled) -> None:
        """Show another filling, or another bobbin."""
        if growth is not self._growth:
            self._growth, self._section = growth, None
        self.filled = filled
        self.redraw()

    def drawn(self, width: int, height: int) -> Picture:
        """The section, and how deep the coil is in the flange."""
        growth = self._growth
        if growth is None or width < 16 or height < 5:
            return blank(width, height)
        section = self._section
        if section is None or (section.width, section.height) != (width, height):
            section = self._section = Section(growth, width, height)
        picture = section.picture(self.filled)
        build = max(growth.at(self.filled.turns))
        final = max(growth.heights_mm[-1])
        deep = f"of {growth.depth_mm:g} mm "
        coming = f" build {build:.1f}, will be {final:.1f} {deep}"
        for words in (*([coming] if final - build > 0.05 else []), f" build {build:.1f} {deep}"):
            if len(words) + 16 <= width:
                put(picture, height - 1, (width - len(words)) // 2, words, "label")
                break
        return picture
