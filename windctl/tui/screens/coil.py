"""One coil of the book: what it is, how it grew, what happened, and whether its record is whole."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

from rich.text import Text
from textual import work
from textual.app import ComposeResult
from textual.binding import BindingType
from textual.containers import Horizontal, Vertical
from textual.widgets import RichLog, Static

from windctl.desk.numbers import ohm, turns
from windctl.errors import WindctlError
from windctl.tui.keymap import key
from windctl.tui.looks import OUTCOMES, VERDICTS
from windctl.tui.screens.between import Between, ways
from windctl.tui.view import target_text
from windctl.tui.widgets.curve import Curve
from windctl.tui.widgets.figures import Figures

if TYPE_CHECKING:
    from windctl.book.verify import VerifyReport
    from windctl.tui.records import Told
    from windctl.tui.session import Session


class CoilScreen(Between):
    """V checks the record against its digests; X writes it out."""

    ABOUT = "One coil as its record tells it. V verifies the record, X writes all of it beside you as JSON."
    BINDINGS: ClassVar[list[BindingType]] = [key("coil.verify"), key("coil.export"), *ways()]

    def __init__(self, session: Session, number: str) -> None:
        super().__init__(session)
        self.number = number
        self.told: Told | None = None

    def heading(self) -> str:
        """The coil's number."""
        return f"Coil {self.number}"

    def body(self) -> ComposeResult:
        """Figures, curves, facts."""
        with Horizontal(id="coil-body"):
            with Vertical(id="coil-left"):
                yield Figures(id="coil-figures")
            with Vertical(id="coil-right"):
                yield Curve(id="coil-curve")
                yield Curve(closer=True, id="coil-closer")
        yield Static("", id="coil-answer", markup=False)
        yield RichLog(id="coil-events", wrap=True, markup=False, highlight=False, auto_scroll=False)

    def on_mount(self) -> None:
        """Read the record."""
        self.read()

    @work(thread=True, exclusive=True, group="told")
    def read(self) -> None:
        """Read the record."""
        try:
            told = self.session.told(self.number)
        except WindctlError as error:
            self.app.call_from_thread(self.answer, str(error))
        else:
            self.app.call_from_thread(self.show, told)

    def show(self, told: Told) -> None:
        """Place it."""
        self.told = told
        self.query_one("#coil-figures", Figures).show(figures(told))
        for curve in self.query(Curve):
            curve.show(told.card.scale, told.curve, [])
        log = self.query_one(RichLog)
        log.clear()
        for since, what in told.lines:
            log.write(Text(f"{since:>7}  {what}"))
        log.focus()

    def answer(self, words: str) -> None:
        """Say something about the record."""
        self.query_one("#coil-answer", Static).update(words)

    def action_verify(self) -> None:
        """Check the record."""
        self.answer("◌ checking")
        self.check_record()

    @work(thread=True, exclusive=True, group="verify")
    def check_record(self) -> None:
        """Check the record."""
        try:
            report = self.session.verify(self.number)
        except WindctlError as error:
            words = str(error)
        else:
            words = verified(report)
        self.app.call_from_thread(self.answer, words)

    @work(thread=True, exclusive=True, group="export")
    def action_export(self) -> None:
        """Write the record out."""
        try:
            words = f"✔ written to {self.session.export(self.number)}"
        except (WindctlError, OSError) as error:
            words = f"✖ not written: {error}"
        self.app.call_from_thread(self.answer, words)


def verified(report: VerifyReport) -> str:
    """A check in words."""
    if not report.broken:
        return "✔ the record agrees with its digests"
    return "✖ " + "; ".join(one.what for one in report.broken)


def figures(told: Told) -> tuple[tuple[str, str], ...]:
    """One coil in rows."""
    head, outcome, verdict = told.head, OUTCOMES[told.head.outcome], VERDICTS[told.head.verdict]
    rows = [
        ("recipe", head.recipe),
        ("batch", f"{head.batch} of {head.of}" if head.of else head.batch),
        ("machine", told.machine),
        ("started", head.started[:16].replace("T", " ")),
        ("outcome", f"{outcome.glyph} {outcome.word}"),
        ("", head.reason),
        ("turns", "" if head.turns is None else turns(head.turns)),
    ]
    if head.dcr_20c_ohm:
        text = ohm(head.dcr_20c_ohm, head.dcr_u95_ohm or 0.0)
        rows.append(("at 20 °C", text.replace("kohm", "kΩ").replace("ohm", "Ω")))
    rows += [
        ("target", target_text(told.card)),
        ("verdict", f"{verdict.glyph} {verdict.word}"),
        ("program", head.program_digest[:16]),
        ("record", head.record_digest[:16]),
    ]
    return tuple((name, value) for name, value in rows if value)
