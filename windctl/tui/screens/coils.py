"""The book: what was wound, a page at a time; the book itself searches, filters and sorts."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

from textual import events, on, work
from textual.app import ComposeResult
from textual.binding import BindingType
from textual.timer import Timer
from textual.widgets import DataTable, Input, Static

from windctl.errors import QueryError, WindctlError
from windctl.tui import coils_view
from windctl.tui.keymap import key
from windctl.tui.page import Page
from windctl.tui.pictures.against import MOST
from windctl.tui.records import written
from windctl.tui.screens.between import Between
from windctl.tui.screens.coil import CoilScreen
from windctl.tui.widgets.table import Table

if TYPE_CHECKING:
    from windctl.tui.session import Session

_TYPING_S = 0.3  # after the last key, before the book is asked


class CoilsScreen(Between):
    """A hundred coils a page."""

    ABOUT = (
        "Every coil in the book. / finds words in recipe, number and notes, and conditions such as "
        "recipe:neck spool:s1 verdict:outside since:2026-01 turns:7000..8000 not note:splice. M marks coils, "
        "C sets them beside the one marked first. Y copies the page and writes it into a file. Enter shows a "
        "coil."
    )
    BINDINGS: ClassVar[list[BindingType]] = [
        key("coils.find"),
        key("coils.filter"),
        key("coils.sort"),
        key("coils.mark"),
        key("coils.compare"),
        key("coils.newer", show=False),
        key("coils.older", show=False),
        key("coils.copy"),
    ]

    def __init__(self, session: Session) -> None:
        super().__init__(session)
        self.page = Page((), 0, 0)
        self.only = ""
        self.sort = ""
        self.marked: list[str] = []
        self._typing: Timer | None = None

    def body(self) -> ComposeResult:
        """The line that finds, the table, what is listed."""
        yield Input(placeholder="words, or recipe:neck verdict:outside since:2026-01 ...", id="coils-find",
                    compact=True)  # fmt: skip
        yield Static("", id="coils-wrong", markup=False)
        yield Table(id="coil-table")
        yield Static("", id="coils-foot", markup=False)

    def on_mount(self) -> None:
        """The first page."""
        self.query_one(Table).focus()

    def on_screen_resume(self) -> None:
        """Coils may have been added meanwhile."""
        self.turn_to(self.page.number)

    def repaint(self) -> None:
        """Other colours, or another width."""
        self.show(self.page)

    # ------------------------------------------------------------ pages

    @property
    def query_text(self) -> str:
        """What is asked of the book."""
        return coils_view.asked(self.query_one("#coils-find", Input).value.strip(), self.only)

    def turn_to(self, number: int) -> None:
        """Ask for a page."""
        self.fetch(number, self.query_text, self.sort)

    @work(thread=True, exclusive=True, group="page")
    def fetch(self, number: int, query: str, sort: str) -> None:
        """Fetch it."""
        try:
            page = self.session.page(number, query, sort)
        except QueryError as error:
            self.app.call_from_thread(self.wrong, coils_view.misunderstood(error))
        except WindctlError as error:
            self.app.call_from_thread(self.wrong, f"✖ {error}")
        else:
            self.app.call_from_thread(self.show, page)

    def wrong(self, words: str) -> None:
        """Say what is wrong with the query; the list stays as it was."""
        line = self.query_one("#coils-wrong", Static)
        line.update(words)
        line.set_class(bool(words), "-there")

    def show(self, page: Page) -> None:
        """Fill the table."""
        self.page = page
        self.wrong("")
        table, width = self.query_one(Table), self.app.size.width
        table.head(coils_view.columns(width, self.sort))
        table.fill((one.number, coils_view.row(one, one.number in self.marked, width)) for one in page.heads)
        self.say()

    def say(self) -> None:
        """What is listed."""
        self.query_one("#coils-foot", Static).update(coils_view.foot(self.page, self.only, self.marked))
        self.refresh_bindings()

    def action_newer(self) -> None:
        """Towards the first page."""
        if self.page.number > 0:
            self.turn_to(self.page.number - 1)

    def action_older(self) -> None:
        """Towards the last page."""
        if self.page.number + 1 < self.page.pages:
            self.turn_to(self.page.number + 1)

    # ------------------------------------------------------------ finding

    def action_find(self) -> None:
        """Type what to find."""
        line = self.query_one("#coils-find", Input)
        line.add_class("-there")
        line.focus()

    @on(Input.Changed, "#coils-find")
    def typing(self) -> None:
        """A moment after the last key, the book is asked."""
        if self._typing is not None:
            self._typing.stop()
        self._typing = self.set_timer(_TYPING_S, lambda: self.turn_to(0))

    @on(Input.Submitted, "#coils-find")
    def found(self) -> None:
        """On to what was found."""
        self.query_one(Table).focus()
        self.turn_to(0)

    def key_down(self, event: events.Key) -> None:
        """From the line into the table."""
        if isinstance(self.focused, Input):
            event.stop()
            self.query_one(Table).focus()

    def action_back(self) -> None:
        """From the line to the table, then to everything, then back."""
        line = self.query_one("#coils-find", Input)
        if line.has_focus:
            self.query_one(Table).focus()
        elif line.has_class("-there"):
            line.value = ""
            line.remove_class("-there")
            self.turn_to(0)
        else:
            self.app.pop_screen()

    def action_filter(self) -> None:
        """The next filter."""
        filters = coils_view.FILTERS
        self.only = filters[(filters.index(self.only) + 1) % len(filters)]
        self.turn_to(0)

    def action_sort(self) -> None:
        """Sorted by the next column."""
        sorts = coils_view.SORTS
        self.sort = sorts[(sorts.index(self.sort) + 1) % len(sorts)]
        self.turn_to(0)

    # ------------------------------------------------------------ showing and comparing

    def action_mark(self) -> None:
        """Mark the coil under the cursor, or no longer; the one marked first is what others are held to."""
        table = self.query_one(Table)
        number = table.chosen
        if number is None:
            return
        if number in self.marked:
            self.marked.remove(number)
        elif len(self.marked) > MOST:
            self.notify(f"{MOST} coils beside the first can be told apart", markup=False)
            return
        else:
            self.marked.append(number)
        head = next(one for one in self.page.heads if one.number == number)
        table.put(number, coils_view.row(head, number in self.marked, self.app.size.width))
        table.action_cursor_down()
        self.say()

    def action_compare(self) -> None:
        """The marked ones, beside the first of them."""
        if len(self.marked) < 2:
            self.notify("first mark two coils or more: M", markup=False)
        else:
            first, *others = self.marked
            self.app.push_screen(CoilScreen(self.session, first, tuple(others)))

    @on(DataTable.RowSelected)
    def selected(self, event: DataTable.RowSelected) -> None:
        """One coil."""
        if event.row_key.value is not None:
            self.app.push_screen(CoilScreen(self.session, event.row_key.value))

    @work(thread=True, exclusive=True, group="copy")
    def action_copy(self) -> None:
        """The page to the terminal's clipboard, and into a file: a terminal does not say what it took."""
        text = coils_view.as_lines(self.page.heads)
        try:
            words = f"✔ copied, and written to {written('coils.tsv', text)}"
        except OSError as error:
            words = f"✖ not written: {error}"
        self.app.call_from_thread(self.app.copy_to_clipboard, text)
        self.app.call_from_thread(self.notify, words, markup=False)
