"""The book: what was wound, the latest first, a page at a time."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

from rich.text import Text
from textual import on, work
from textual.app import ComposeResult
from textual.binding import BindingType
from textual.widgets import DataTable, Static

from windctl.desk.numbers import grouped, ohm
from windctl.errors import WindctlError
from windctl.tui.keymap import key
from windctl.tui.looks import OUTCOMES, VERDICTS
from windctl.tui.page import Page
from windctl.tui.screens.between import Between, ways
from windctl.tui.screens.coil import CoilScreen

if TYPE_CHECKING:
    from windctl.book.heads import CoilHead
    from windctl.tui.session import Session

FILTERS = (None, "finished", "open", "stopped", "tripped")


class CoilsScreen(Between):
    """A hundred coils a page; the book sorts and filters."""

    ABOUT = "Every coil in the book, the latest first. Enter shows one, F filters by how they ended."
    BINDINGS: ClassVar[list[BindingType]] = [
        key("coils.newer"),
        key("coils.older"),
        key("coils.filter"),
        *ways("coils"),
    ]

    def __init__(self, session: Session) -> None:
        super().__init__(session)
        self.page = Page((), 0, 0)
        self.filter: str | None = None

    def heading(self) -> str:
        """What the room is."""
        return "Coils"

    def body(self) -> ComposeResult:
        """The table."""
        yield DataTable(id="coil-table", cursor_type="row", zebra_stripes=False)
        yield Static("", id="coils-foot", markup=False)

    def on_mount(self) -> None:
        """The first page."""
        table = self.query_one(DataTable)
        table.add_columns("coil", "recipe", "started", "outcome", "turns", "at 20 °C", "verdict")
        table.focus()
        self.turn_to(0)

    def on_screen_resume(self) -> None:
        """Coils may have been added meanwhile."""
        self.turn_to(self.page.number)

    @work(thread=True, exclusive=True, group="page")
    def turn_to(self, number: int) -> None:
        """Fetch a page."""
        try:
            page = self.session.page(number, self.filter)
        except WindctlError as error:
            self.app.call_from_thread(self.query_one("#coils-foot", Static).update, str(error))
        else:
            self.app.call_from_thread(self.show, page)

    def show(self, page: Page) -> None:
        """Fill the table."""
        self.page = page
        table = self.query_one(DataTable)
        table.clear()
        for head in page.heads:
            table.add_row(*[Text(cell) for cell in cells(head)], key=head.number)
        which = f"only {self.filter}" if self.filter else "all"
        self.query_one("#coils-foot", Static).update(
            f"{grouped(page.total)} coils, {which} · page {page.number + 1} of {page.pages} · Enter shows one"
        )

    def action_newer(self) -> None:
        """Towards the latest."""
        if self.page.number > 0:
            self.turn_to(self.page.number - 1)

    def action_older(self) -> None:
        """Towards the first."""
        if self.page.number + 1 < self.page.pages:
            self.turn_to(self.page.number + 1)

    def action_filter(self) -> None:
        """The next filter."""
        self.filter = FILTERS[(FILTERS.index(self.filter) + 1) % len(FILTERS)]
        self.turn_to(0)

    @on(DataTable.RowSelected)
    def selected(self, event: DataTable.RowSelected) -> None:
        """One coil."""
        if event.row_key.value is not None:
            self.app.push_screen(CoilScreen(self.session, event.row_key.value))


def cells(head: CoilHead) -> tuple[str, ...]:
    """One coil in a row."""
    outcome = OUTCOMES.get(head.outcome)
    verdict = VERDICTS.get(head.verdict)
    resistance = ""
    if head.dcr_20c_ohm:
        text = ohm(head.dcr_20c_ohm, head.dcr_u95_ohm or 0.0)
        resistance = text.replace("kohm", "kΩ").replace("ohm", "Ω")
    return (
        head.number,
        head.recipe,
        head.started[:16].replace("T", " "),
        f"{outcome.glyph} {outcome.word}" if outcome else head.outcome,
        "" if head.turns is None else grouped(head.turns),
        resistance,
        f"{verdict.glyph} {verdict.word}" if verdict else head.verdict,
    )
