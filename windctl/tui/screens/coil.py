"""One coil of the book: what it is, how it grew, what happened, and whether its record is whole."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, ClassVar

from rich.text import Text
from textual import work
from textual.app import ComposeResult
from textual.binding import BindingType
from textual.containers import Horizontal, Vertical
from textual.widgets import RichLog, Static

from windctl.errors import WindctlError
from windctl.tui import coil_view
from windctl.tui.dialogs.choose import Choose
from windctl.tui.keymap import key
from windctl.tui.pictures.against import MOST, Other
from windctl.tui.records import written
from windctl.tui.screens.between import Between
from windctl.tui.widgets.against import Against
from windctl.tui.widgets.curve import Curve
from windctl.tui.widgets.figures import Figures

if TYPE_CHECKING:
    from windctl.book.heads import CoilHead
    from windctl.shop.compare import Differing
    from windctl.tui.records import Told
    from windctl.tui.session import Session


class CoilScreen(Between):
    """The record, read; beside others of its kind if asked to."""

    ABOUT = (
        "One coil as its record tells it. V verifies the record against its digests. C sets another coil of "
        "the recipe beside it: how much more resistance that has at the same turn, and what was set "
        "otherwise; D draws that. R writes the report, a page to print, X the whole record as JSON, Y copies "
        "it as text. Files are written into the folder that you are in, and named."
    )
    BINDINGS: ClassVar[list[BindingType]] = [
        key("coil.verify"),
        key("coil.compare"),
        key("coil.alone"),
        key("coil.draw"),
        key("coil.report"),
        key("coil.export"),
        key("coil.copy"),
    ]

    def __init__(self, session: Session, number: str, others: tuple[str, ...] = ()) -> None:
        super().__init__(session)
        self.number = number
        self.told: Told | None = None
        self.others: list[Told] = []
        self.differing: tuple[Differing, ...] = ()
        self._wanted = others

    def body(self) -> ComposeResult:
        """Figures, curves, facts."""
        with Horizontal(id="coil-body"):
            with Vertical(id="coil-left"):
                yield Figures(id="coil-figures")
            with Vertical(id="coil-right"):
                yield Curve(id="coil-curve")
                yield Curve(closer=True, id="coil-closer")
                yield Against(id="coil-against")
        yield Static("", id="coil-pair", markup=False)
        yield Static("", id="coil-beside", markup=False)
        yield Static("", id="coil-answer", markup=False)
        yield RichLog(id="coil-events", min_width=20, markup=False, highlight=False, auto_scroll=False)

    def on_mount(self) -> None:
        """Read the record; of a long coil that takes a moment."""
        self.query_one("#coil-figures", Figures).show((("coil", self.number), ("record", "is being read")))
        self.read()

    @work(thread=True, exclusive=True, group="told")
    def read(self) -> None:
        """Read the record, and those to compare it with."""
        try:
            told = self.session.told(self.number)
            others = [self.session.told(number) for number in self._wanted][:MOST]
            differing = self.session.differing(_numbers(told, others)) if others else ()
        except WindctlError as error:
            self.app.call_from_thread(self.answer, f"✖ {error}")
        else:
            self.app.call_from_thread(self.show, told, others, differing)

    def show(self, told: Told, others: list[Told], differing: tuple[Differing, ...]) -> None:
        """Place it."""
        self.told = told
        self.query_one("#coil-figures", Figures).show(coil_view.figures(told))
        pair = self.query_one("#coil-pair", Static)
        pair.update(told.pair)
        pair.set_class(bool(told.pair), "-there")
        for curve in self.query(Curve):
            curve.show(told.card.scale, told.curve, [])
        self.query_one(RichLog).focus()
        self.beside(others, differing)

    def tell(self) -> None:
        """What was set otherwise and what happened, as wide as there is room."""
        if self.told is None:
            return
        log = self.query_one(RichLog)
        log.clear()
        lines = (*coil_view.otherwise(self.differing), *self.told.lines)
        for line in coil_view.story(lines, log.scrollable_content_region.width):
            log.write(Text(line))

    def on_resize(self) -> None:
        """Other lines."""
        self.call_after_refresh(self.tell)

    def beside(self, others: list[Told], differing: tuple[Differing, ...] = ()) -> None:
        """Other coils beside it, or none."""
        if self.told is None:
            return
        self.others, self.differing = others, differing
        compared = bool(self.others)
        self.set_class(compared, "-beside")
        drawn = tuple(Other(one.head.number, one.curve) for one in self.others)
        words = coil_view.against(self.told.head, [one.head for one in self.others]) if compared else ""
        line = self.query_one("#coil-beside", Static)
        line.update(words)
        line.set_class(compared, "-there")
        self.query_one(Against).show(self.told.curve, drawn)
        self.call_after_refresh(self.query_one(Against).redraw)
        self.call_after_refresh(self.tell)
        self.refresh_bindings()

    def answer(self, words: str) -> None:
        """Say something about the record."""
        line = self.query_one("#coil-answer", Static)
        line.update(words)
        line.set_class(bool(words), "-there")

    def check_action(self, action: str, parameters: tuple[object, ...]) -> bool | None:
        """Only what can be done is offered."""
        if action in ("alone", "draw"):
            return bool(self.others)
        return super().check_action(action, parameters)

    # ------------------------------------------------------------ comparing

    def action_compare(self) -> None:
        """Choose another coil of the recipe."""
        if len(self.others) >= MOST:
            self.notify(f"{MOST} coils beside the first can be told apart", markup=False)
        else:
            self.look_for_others()

    @work(thread=True, exclusive=True, group="alike")
    def look_for_others(self) -> None:
        """Coils of the same recipe."""
        try:
            heads = self.session.alike(self.number)
        except WindctlError as error:
            self.app.call_from_thread(self.answer, f"✖ {error}")
        else:
            self.app.call_from_thread(self.choose, heads)

    def choose(self, heads: tuple[CoilHead, ...]) -> None:
        """One of them."""
        there = {one.head.number for one in self.others}
        lines = [(one.number, coil_view.line_of(one)) for one in heads if one.number not in there]
        if not lines:
            self.notify("there is no other finished coil of this recipe", markup=False)
            return
        words = (
            "Coils of the same recipe. Any others are marked in the list of coils (M), and compared there."
        )
        self.app.push_screen(Choose(f"Compare {self.number} with", words, lines), self._chose)

    def _chose(self, number: str | None) -> None:
        if number is not None:
            self.set_beside(number)

    @work(thread=True, exclusive=True, group="beside")
    def set_beside(self, number: str) -> None:
        """Read the other one, and set it beside."""
        if self.told is None:
            return
        try:
            others = [*self.others, self.session.told(number)]
            differing = self.session.differing(_numbers(self.told, others))
        except WindctlError as error:
            self.app.call_from_thread(self.answer, f"✖ {error}")
        else:
            self.app.call_from_thread(self.beside, others, differing)

    def action_alone(self) -> None:
        """Without the others."""
        self.beside([])

    def action_draw(self) -> None:
        """The coils beside each other as a drawing to keep."""
        if self.told is not None and self.others:
            numbers = _numbers(self.told, self.others)
            self.write(lambda: self.session.draw(numbers))

    # ------------------------------------------------------------ checking and writing

    def action_verify(self) -> None:
        """Check the record."""
        self.answer("◌ checking")
        self.check_record()

    @work(thread=True, exclusive=True, group="verify")
    def check_record(self) -> None:
        """Check the record."""
        try:
            words = coil_view.verified(self.session.verify(self.number))
        except WindctlError as error:
            words = f"✖ {error}"
        self.app.call_from_thread(self.answer, words)

    def action_export(self) -> None:
        """Write the record out."""
        self.write(lambda: self.session.export(self.number))

    def action_report(self) -> None:
        """Write its report, a page to print."""
        self.write(lambda: self.session.report(self.number))

    def action_copy(self) -> None:
        """To the terminal's clipboard, and into a file: a terminal does not say what it took."""
        if self.told is not None:
            text = coil_view.as_text(self.told)
            self.app.copy_to_clipboard(text)
            self.write(lambda: written(f"{self.number}.txt", text), "copied, and written to")

    @work(thread=True, exclusive=True, group="write")
    def write(self, made: Callable[[], Path], done: str = "written to") -> None:
        """Write a file, and name it."""
        self.app.call_from_thread(self.answer, "◌ writing")
        try:
            words = f"✔ {done} {made()}"
        except (WindctlError, OSError) as error:
            words = f"✖ not written: {error}"
        self.app.call_from_thread(self.answer, words)


def _numbers(told: Told, others: list[Told]) -> list[str]:
    return [told.head.number, *(one.head.number for one in others)]
