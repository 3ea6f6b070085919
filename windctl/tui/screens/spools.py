"""The shop's spools: what is left on each, for how many coils, and what its coils have taught."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import TYPE_CHECKING, ClassVar

from textual import on, work
from textual.app import ComposeResult
from textual.binding import BindingType
from textual.containers import Vertical
from textual.widgets import DataTable, Static

from windctl.desk.spool_keeping import keep_new, keep_piece, keep_weighing
from windctl.errors import UsageError, WindctlError
from windctl.tui import spool_forms, spool_view
from windctl.tui.dialogs.form import Form
from windctl.tui.field import Field
from windctl.tui.keymap import key
from windctl.tui.screens.between import Between
from windctl.tui.widgets.figures import Figures
from windctl.tui.widgets.known import Known
from windctl.tui.widgets.table import Table

if TYPE_CHECKING:
    from windctl.desk.spools import SpoolState
    from windctl.tui.session import Session

Typed = Mapping[str, str]


class SpoolsScreen(Between):
    """Enter takes a spool for the next coils; a scale and a meter say more of it."""

    ABOUT = (
        "The spools of wire in the book. Enter takes one for the coils to come, and once more takes none. "
        "What is left is the last weighing less what coils took since. Its ohm per metre is learnt from "
        "measured pieces and from finished coils; the bars below show how much closer that is than the table."
    )
    HERE = "spools"
    BINDINGS: ClassVar[list[BindingType]] = [
        key("spools.take"),
        key("spools.add"),
        key("spools.weigh"),
        key("spools.measure"),
    ]

    def __init__(self, session: Session) -> None:
        super().__init__(session)
        self.spools: tuple[SpoolState, ...] = ()
        self.looked = False

    def body(self) -> ComposeResult:
        """The list, and what is known of one."""
        yield Table(id="spool-table")
        with Vertical(id="spool-known"):
            yield Figures(id="spool-figures")
            yield Known(id="spool-bars")
            yield Figures(id="spool-facts")
        yield Static("", id="spools-foot", markup=False)

    def on_mount(self) -> None:
        """Look into the book."""
        self.query_one(Table).focus()
        self.say("◌ reads what coils have taught of them")
        self.look()

    def repaint(self) -> None:
        """Other colours, or another width."""
        self.show(self.spools)

    @work(thread=True, exclusive=True, group="spools")
    def look(self) -> None:
        """Read the spools."""
        try:
            spools = self.session.spools()
        except WindctlError as error:
            self.app.call_from_thread(self.say, f"✖ {error}")
        else:
            self.app.call_from_thread(self.show, spools)

    def show(self, spools: tuple[SpoolState, ...]) -> None:
        """Fill the table."""
        self.spools, self.looked = spools, True
        chosen, table, width = self.session.spool, self.query_one(Table), self.app.size.width
        table.head(spool_view.columns(width))
        table.fill((one.id, spool_view.row(one, one.id == chosen, width)) for one in spools)
        self.detail()
        if not spools:
            self.say("No spools yet. A keeps one; coils wound from it then teach how its wire is.")
        elif chosen is None:
            self.say("○ no spool is named for the next coils: Enter takes the one marked.")
        else:
            self.say(f"▶ the next coils are wound from {chosen}. Enter on it takes none.")

    @on(DataTable.RowHighlighted)
    def detail(self) -> None:
        """What is known of the spool under the cursor."""
        one = self.marked
        self.query_one("#spool-figures", Figures).show(spool_view.details(one) if one else ())
        self.query_one(Known).show(spool_view.parts(one) if one else None)
        self.query_one("#spool-facts", Figures).show(spool_view.facts(one) if one else ())

    @property
    def marked(self) -> SpoolState | None:
        """The spool under the cursor."""
        name = self.query_one(Table).chosen
        return next((one for one in self.spools if one.id == name), None)

    def say(self, words: str) -> None:
        """The line below."""
        self.query_one("#spools-foot", Static).update(words)

    # ------------------------------------------------------------ taking one

    @on(DataTable.RowSelected)
    def action_take(self) -> None:
        """For the coils to come, or none."""
        one = self.marked
        if one is None:
            return
        if self.session.run is not None:
            self.notify("a coil is on the machine: T there tells of another spool", markup=False)
            return
        self.session.take_spool(None if self.session.spool == one.id else one.id)
        self.show(self.spools)

    # ------------------------------------------------------------ keeping

    def action_add(self) -> None:
        """A new spool."""

        def keep(typed: Typed) -> str:
            name = keep_new(self.session.shared, spool_forms.new_spool(typed))
            return f"✔ {name} is kept: write its name on it"

        self.ask(
            "A new spool",
            "Weigh it full and again empty some day: the difference is its wire.",
            spool_forms.NEW,
            spool_forms.new_spool,
            keep,
        )

    def action_weigh(self) -> None:
        """What the wire on it weighs now."""
        one = self.marked
        if one is None:
            return

        def keep(typed: Typed) -> str:
            grams = spool_forms.weighed(typed)
            keep_weighing(self.session.shared, one.id, grams)
            return f"✔ {one.id} weighs {grams:g} g"

        words = "The wire alone. The scale is believed to within a gram."
        self.ask(f"Weigh {one.id}", words, spool_forms.WEIGH, spool_forms.weighed, keep)

    def action_measure(self) -> None:
        """What a piece of it measured."""
        one = self.marked
        if one is None:
            return

        def keep(typed: Typed) -> str:
            keep_piece(self.session.shared, one.id, *spool_forms.piece(typed))
            return f"✔ the piece from {one.id} is kept"

        words = (
            f"{one.wire}. A metre or two from the loose end, laid straight and measured at rest; "
            "half a per cent of it is believed to be uncertain."
        )
        self.ask(f"Measure a piece of {one.id}", words, spool_forms.PIECE, spool_forms.piece, keep)

    def ask(
        self,
        heading: str,
        words: str,
        fields: Sequence[Field],
        means: Callable[[Typed], object],
        keep: Callable[[Typed], str],
        typed: Typed | None = None,
        problem: str = "",
    ) -> None:
        """Put a form; what the book refuses comes back into it, as it was typed."""

        def wrong(lines: Typed) -> str:
            try:
                means(lines)
            except UsageError as error:
                return str(error)
            return ""

        def answered(lines: dict[str, str] | None) -> None:
            if lines is not None:
                self.keep(lines, keep, lambda why: self.ask(heading, words, fields, means, keep, lines, why))

        self.app.push_screen(Form(heading, words, fields, wrong, typed, problem), answered)

    @work(thread=True, group="keep")
    def keep(self, lines: Typed, keep: Callable[[Typed], str], again: Callable[[str], None]) -> None:
        """Write it into the book."""
        try:
            words = keep(lines)
        except WindctlError as error:
            self.app.call_from_thread(again, str(error))
        else:
            self.app.call_from_thread(self.notify, words, markup=False)
            self.look()
