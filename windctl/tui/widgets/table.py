"""A table whose cells are plain text or a state: word, glyph and colour. Never parsed as markup."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from rich.text import Text
from textual.coordinate import Coordinate
from textual.widgets import DataTable

from windctl.tui.looks import Look

Entry = str | Look


class Table(DataTable[Text]):
    """Rows with keys; filling it anew keeps the cursor on its row where that is still there."""

    def __init__(self, *, id: str | None = None) -> None:
        super().__init__(id=id, cursor_type="row")

    def head(self, names: Sequence[str]) -> None:
        """Other columns; the rows go with the old ones."""
        if [str(one.label) for one in self.ordered_columns] != list(names):
            self.clear(columns=True)
            self.add_columns(*[Text(name) for name in names])

    def put(self, key: str, entries: Sequence[Entry]) -> None:
        """Another content of one row."""
        row = self.get_row_index(key)
        for column, entry in enumerate(entries):
            self.update_cell_at(Coordinate(row, column), self._text(entry), update_width=True)

    def fill(self, rows: Iterable[tuple[str, Sequence[Entry]]]) -> None:
        """Show other rows: (key, entries)."""
        before = self.chosen
        self.clear()
        for key, entries in rows:
            self.add_row(*[self._text(entry) for entry in entries], key=key)
        if before is not None and before in self.rows:
            self.move_cursor(row=self.get_row_index(before))

    @property
    def chosen(self) -> str | None:
        """The key of the row under the cursor."""
        if not self.row_count or not 0 <= self.cursor_row < self.row_count:
            return None
        return self.coordinate_to_cell_key(self.cursor_coordinate).row_key.value

    def _text(self, entry: Entry) -> Text:
        if isinstance(entry, str):
            return Text(entry, no_wrap=True)
        words = f"{entry.glyph} {entry.word}".strip()
        return Text(words, style=self.app.theme_variables.get(f"wc-{entry.role}", ""), no_wrap=True)
