"""A chart in characters: level lines, points as letters, and labelled axes. Needs no colour."""

from __future__ import annotations

from collections.abc import Sequence

MARGIN = 11  # characters left of the field, for figures


class TextChart:
    """A field of `columns` by `rows` characters between two values, low < high. What is drawn later lies on
    top; what falls outside is left out."""

    def __init__(self, columns: int, rows: int, low: float, high: float) -> None:
        self.columns, self.rows = max(columns, 1), max(rows, 2)
        self._low, self._high = low, high
        self._cells = [[" "] * self.columns for _ in range(self.rows)]
        self._labels: dict[int, str] = {}

    def row(self, value: float) -> int:
        """The row of a value, 0 at the top; outside the field where the value is."""
        up = (value - self._low) / (self._high - self._low)
        return round((1.0 - up) * (self.rows - 1))

    def level(self, value: float, char: str, label: str = "") -> None:
        """A line across, its label left of it. Of two labels in one row the first stays."""
        row = self.row(value)
        if 0 <= row < self.rows:
            self._cells[row] = [char] * self.columns
            if label:
                self._labels.setdefault(row, label)

    def point(self, column: int, value: float, char: str) -> None:
        """One character."""
        row = self.row(value)
        if 0 <= row < self.rows and 0 <= column < self.columns:
            self._cells[row][column] = char

    def lines(self, below: Sequence[tuple[int, str]], wall: str = "|") -> list[str]:
        """The chart, top line first. `below`: texts under columns, left out where they would touch."""
        drawn = [
            f"{self._labels.get(row, ''):>{MARGIN - 1}}{wall}{''.join(cells)}".rstrip()
            for row, cells in enumerate(self._cells)
        ]
        last = [" "] * (MARGIN + self.columns)
        free = 0
        for column, text in below:
            at = max(min(MARGIN + column - len(text) // 2, len(last) - len(text)), 0)
            if at >= free:
                last[at : at + len(text)] = text
                free = at + len(text) + 1
        return [*drawn, "".join(last).rstrip()]
