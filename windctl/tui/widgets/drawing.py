"""A widget that shows a picture made of cells."""

from __future__ import annotations

from collections.abc import Sequence

from rich.segment import Segment
from rich.style import Style
from textual.geometry import Region
from textual.strip import Strip
from textual.widget import Widget

from windctl.tui.pictures.cells import Cell, Ink, Picture
from windctl.tui.theme import colour_of


class Drawing(Widget):
    """Places cells and gives their inks the theme's colours. What is drawn comes from `drawn`."""

    can_focus = False

    def __init__(self, *, id: str | None = None, classes: str | None = None) -> None:
        super().__init__(id=id, classes=classes)
        self._picture: Picture = []
        self._styles: dict[tuple[Ink, Ink], Style] = {}

    def drawn(self, width: int, height: int) -> Picture:
        """The picture at this size."""
        raise NotImplementedError

    def redraw(self) -> None:
        """Make the picture anew; the terminal is sent only the rows and columns that differ."""
        width, height = self.size.width, self.size.height
        before, self._picture = self._picture, self.drawn(width, height) if width > 0 and height > 0 else []
        if len(before) != len(self._picture):
            self.refresh()
            return
        changed = []
        for row, (was, now) in enumerate(zip(before, self._picture, strict=True)):
            if was != now:
                first, last = _between(was, now)
                changed.append(Region(first, row, last - first + 1, 1))
        if changed:
            self.refresh(*_joined(changed))

    def on_resize(self) -> None:
        """Another size, another picture."""
        self.redraw()

    def notify_style_update(self) -> None:
        """Another theme, other colours."""
        self._styles = {}
        super().notify_style_update()

    def render_line(self, y: int) -> Strip:
        """One row."""
        width = self.size.width
        ground = self._style((None, None))
        if y >= len(self._picture):
            return Strip.blank(width, ground)
        segments = []
        text, last = "", None
        for cell in self._picture[y][:width]:
            ink = (cell.ink, cell.paper)
            if ink != last and text and last is not None:
                segments.append(Segment(text, self._style(last)))
                text = ""
            text, last = text + cell.char, ink
        if text and last is not None:
            segments.append(Segment(text, self._style(last)))
        return Strip(segments).adjust_cell_length(width, ground)

    def _style(self, inks: tuple[Ink, Ink]) -> Style:
        style = self._styles.get(inks)
        if style is None:
            variables = self.app.theme_variables
            ink, paper = (colour_of(one, variables) for one in inks)
            style = self._styles[inks] = self.rich_style + Style(color=ink, bgcolor=paper)
        return style


def _joined(rows: list[Region]) -> list[Region]:
    """One region for all where it is hardly larger: each costs more than a few cells do."""
    whole = Region.from_union(rows)
    return [whole] if 4 * whole.area <= 5 * sum(row.area for row in rows) else rows


def _between(was: Sequence[Cell], now: Sequence[Cell]) -> tuple[int, int]:
    """The first and the last column in which two rows that differ do so."""
    most = min(len(was), len(now))
    first = next((place for place in range(most) if was[place] != now[place]), most)
    if len(was) != len(now):
        return first, max(len(was), len(now)) - 1
    return first, next(place for place in range(most - 1, -1, -1) if was[place] != now[place])


def row_of(text: str, ink: Ink, paper: Ink, width: int) -> list[Cell]:
    """A row of `width` cells that begins with `text`."""
    return [Cell(char, ink, paper) for char in text[:width].ljust(width)]
