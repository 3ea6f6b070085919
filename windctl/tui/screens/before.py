"""Before a coil: how the bobbin sits, what to check, and the last word before the machine is opened."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, ClassVar

from textual import on, work
from textual.app import ComposeResult
from textual.binding import BindingType
from textual.containers import Horizontal, Vertical
from textual.widgets import Input, Static

from windctl.errors import WindctlError
from windctl.tui.before_words import checklist, figures_of, first_of, orientation_of, repeats
from windctl.tui.dialogs.say import Say
from windctl.tui.keymap import key
from windctl.tui.screens.room import Room
from windctl.tui.screens.wind import WindScreen
from windctl.tui.widgets.checklist import Checklist
from windctl.tui.widgets.figures import Figures
from windctl.tui.widgets.orientation import OrientationDrawing

if TYPE_CHECKING:
    from windctl.tui.before_words import First
    from windctl.tui.recipes import Preview
    from windctl.tui.session import Run, Session


class BeforeScreen(Room):
    """Every line is confirmed, then S opens the machine. Nothing turns by that on a real one."""

    ABOUT = (
        "Mount the bobbin as drawn and confirm line by line with Enter. S opens the machine and sets it up; "
        "on a real machine nothing turns before you have typed go, or pressed the pedal. Two lines are done "
        "there before that: a contact is zeroed by reading its leads put together (Z), and in a dry pass (P) "
        "the guide goes to its far turn-round and back, and you see whether it stays inside both flanges: "
        "the arrows nudge it to where it is right."
    )
    BINDINGS: ClassVar[list[BindingType]] = [
        key("before.start"),
        key("before.zero"),
        key("before.pass"),
        key("back"),
    ]

    def __init__(
        self, session: Session, preview: Preview, batch: str = "", of: int = 0, *, again: bool = False
    ) -> None:
        super().__init__(session)
        self.preview = preview
        self._again = again  # a coil was wound since: its wire is off the spool, and it may have taught
        self._batch = batch or session.shared.batch or ""
        self._of = of or session.shared.of or 0
        self._opening = False
        self._planning = False
        self.first = first_of(preview.plan, session.profile, session.simulated)

    def heading(self) -> str:
        """The recipe."""
        return self.preview.recipe.name

    def body(self) -> ComposeResult:
        """Drawing and figures on the left, the list on the right."""
        recipe = self.preview.recipe
        with Horizontal(id="before-body"):
            with Vertical(id="before-left"):
                yield OrientationDrawing(
                    orientation_of(recipe), recipe.coil.mounted == "face out", id="orientation"
                )
                yield Figures(figures_of(self.preview.plan), id="before-figures")
                yield Static("", classes="before-gap", markup=False)
                yield Figures(wrapped=True, id="before-repeats")
            with Vertical(id="before-right"):
                yield Static("Check, then confirm each line", classes="heading", markup=False)
                yield Checklist(self._items(), id="checklist")
                with Horizontal(id="batch-row"):
                    yield Input(self._batch, placeholder="batch, if any", id="batch")
                    yield Input(str(self._of or ""), placeholder="of", type="integer", id="batch-of")
                yield Static("", id="before-state", markup=False)

    def on_mount(self) -> None:
        """Begin with the list."""
        self.query_one(Checklist).focus()
        if self._again:
            self.replan()
        self.compare()
        self._say(False)

    def on_screen_resume(self) -> None:
        """Back from the spools, another one may have been taken: then it is another coil."""
        if (self.session.spool or "") != self.preview.supply.id and not self._opening:
            self.replan()

    def replan(self) -> None:
        """The same recipe with the wire that is taken now, and what coils have taught by now."""
        self._planning = True
        self.plan()

    @work(thread=True, exclusive=True, group="plan")
    def plan(self) -> None:
        """Plan it."""
        self.app.call_from_thread(self.planned, self.session.preview(self.preview.listed))

    def planned(self, made: Preview | str) -> None:
        """Show the other coil, or say why there is none."""
        self._planning = False
        if isinstance(made, str):
            self.app.pop_screen()
            self.app.push_screen(Say("It cannot be wound so", made))
            return
        self.preview = made
        self.query_one(Figures).show(figures_of(made.plan))
        self.compare()

    @on(Input.Changed)
    def batch_changed(self) -> None:
        """Another batch, another place in it."""
        self.compare()

    @work(thread=True, exclusive=True, group="compare")
    def compare(self) -> None:
        """What this coil repeats."""
        batch, of = self._batch_and_number()
        try:
            last = self.session.repeats(self.preview.recipe.name, batch)
        except WindctlError as error:
            rows: tuple[tuple[str, str], ...] = (("book", str(error)),)
        else:
            rows = repeats(last, self.preview, self.preview.listed.text, batch, of)
        self.app.call_from_thread(self.query_one("#before-repeats", Figures).show, rows)

    def _batch_and_number(self) -> tuple[str, int]:
        batch = self.query_one("#batch", Input).value.strip()
        of = self.query_one("#batch-of", Input).value.strip()
        return batch, int(of) if of.isdecimal() and batch else 0

    @on(Checklist.Changed)
    def changed(self, event: Checklist.Changed) -> None:
        """Say whether it can start."""
        self._say(event.complete)

    def _say(self, complete: bool) -> None:
        words = "□ Confirm each line with Enter; then S starts."
        if complete:
            there = self.first.words
            words = f"○ S opens the machine{f'. Then there: {there}' if there else ' and sets it up'}."
        state = self.query_one("#before-state", Static)
        if str(state.content) != words:  # each change lays the whole room out anew
            state.update(words)

    def _items(self) -> tuple[str, ...]:
        session = self.session
        return checklist(self.preview.recipe, session.profile, session.simulated, self.first)

    def check_action(self, action: str, parameters: tuple[object, ...]) -> bool | None:
        """A dry pass only where a motor guides, a zeroing only where the board's contact reads."""
        if action == "dry_pass":
            return self.session.profile.guide.kind == "step"
        if action == "zero":
            return self.session.profile.readings.by_contact
        return super().check_action(action, parameters)

    def action_dry_pass(self) -> None:
        """With a dry pass or without."""
        if self.session.profile.guide.kind == "step":
            self._do_first(replace(self.first, dry_pass=not self.first.dry_pass))

    def action_zero(self) -> None:
        """With a zeroing of the contact or without."""
        if self.session.profile.readings.by_contact:
            self._do_first(replace(self.first, zero=not self.first.zero))

    def _do_first(self, first: First) -> None:
        self.first = first
        listed = self.query_one(Checklist)
        listed.reword(self._items())
        self._say(listed.complete)

    def action_back(self) -> None:
        """To the recipes."""
        self.app.pop_screen()

    def action_start(self) -> None:
        """Open the machine, once everything is confirmed."""
        if not self.query_one(Checklist).complete:
            self.notify("first confirm every line", markup=False)
            return
        if self._planning:
            self.notify("the coil is being planned anew", markup=False)
            return
        if self._opening:
            return
        self._opening = True
        self.begin(*self._batch_and_number(), self.first)

    @work(thread=True, exclusive=True, group="begin")
    def begin(self, batch: str, of: int, first: First) -> None:
        """Open the machine."""
        try:
            run = self.session.begin(self.preview, batch, of, first=first)
        except WindctlError as error:
            self.app.call_from_thread(self.failed, str(error))
        else:
            self.app.call_from_thread(self.begun, run)

    def failed(self, words: str) -> None:
        """Say why, and stay."""
        self._opening = False
        self.app.push_screen(Say("The machine cannot be opened", words))

    def begun(self, run: Run) -> None:
        """On to the coil; this room is done with."""
        self.app.switch_screen(WindScreen(self.session, run, self.preview))
