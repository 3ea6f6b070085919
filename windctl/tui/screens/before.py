"""Before a coil: how the bobbin sits, what to check, and the last word before the machine is opened."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

from textual import on, work
from textual.app import ComposeResult
from textual.binding import BindingType
from textual.containers import Horizontal, Vertical
from textual.widgets import Input, Static

from windctl.errors import WindctlError
from windctl.tui.before_words import checklist, figures_of, orientation_of, since_last
from windctl.tui.dialogs.say import Say
from windctl.tui.keymap import key
from windctl.tui.screens.room import Room
from windctl.tui.screens.wind import WindScreen
from windctl.tui.widgets.checklist import Checklist
from windctl.tui.widgets.figures import Figures
from windctl.tui.widgets.orientation import OrientationDrawing

if TYPE_CHECKING:
    from windctl.tui.recipes import Preview
    from windctl.tui.session import Run, Session


class BeforeScreen(Room):
    """Every line is confirmed, then S opens the machine. Nothing turns by that on a real one."""

    ABOUT = (
        "Mount the bobbin as drawn and confirm line by line with Enter. S opens the machine and sets it up; "
        "on a real machine nothing turns before you have typed go, or pressed the pedal."
    )
    BINDINGS: ClassVar[list[BindingType]] = [key("before.start"), key("back")]

    def __init__(self, session: Session, preview: Preview, batch: str = "", of: int = 0) -> None:
        super().__init__(session)
        self.preview = preview
        self._batch = batch or session.shared.batch or ""
        self._of = of or session.shared.of or 0
        self._opening = False

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
                yield Static("", id="before-facts", classes="quiet", markup=False)
                yield Figures(figures_of(self.preview.plan), id="before-figures")
            with Vertical(id="before-right"):
                yield Static("Check, then confirm each line", classes="heading", markup=False)
                items = checklist(recipe, self.session.profile, self.session.simulated)
                yield Checklist(items, id="checklist")
                with Horizontal(id="batch-row"):
                    yield Input(self._batch, placeholder="batch, if any", id="batch")
                    yield Input(str(self._of or ""), placeholder="of", type="integer", id="batch-of")
                yield Static("", id="before-state", markup=False)

    def on_mount(self) -> None:
        """Begin with the list."""
        self.query_one(Checklist).focus()
        self.compare()
        self._say(False)

    def on_screen_resume(self) -> None:
        """Back from the spools, another one may have been taken: then it is another coil."""
        if (self.session.spool or "") != self.preview.supply.id and not self._opening:
            self.replan()

    @work(thread=True, exclusive=True, group="plan")
    def replan(self) -> None:
        """The same recipe with the wire that is taken now."""
        self.app.call_from_thread(self.planned, self.session.preview(self.preview.listed))

    def planned(self, made: Preview | str) -> None:
        """Show the other coil, or say why there is none."""
        if isinstance(made, str):
            self.app.pop_screen()
            self.app.push_screen(Say("It cannot be wound so", made))
            return
        self.preview = made
        self.query_one(Figures).show(figures_of(made.plan))
        self.compare()

    @work(thread=True, group="compare")
    def compare(self) -> None:
        """What this coil repeats."""
        try:
            last = self.session.last_of(self.preview.recipe.name)
        except WindctlError as error:
            words = str(error)
        else:
            words = since_last(last, self.preview.recipe, self.preview.plan)
        self.app.call_from_thread(self.query_one("#before-facts", Static).update, words)

    @on(Checklist.Changed)
    def changed(self, event: Checklist.Changed) -> None:
        """Say whether it can start."""
        self._say(event.complete)

    def _say(self, complete: bool) -> None:
        words = (
            "○ S opens the machine and sets it up."
            if complete
            else "□ Confirm each line with Enter; then S starts."
        )
        self.query_one("#before-state", Static).update(words)

    def action_back(self) -> None:
        """To the recipes."""
        self.app.pop_screen()

    def action_start(self) -> None:
        """Open the machine, once everything is confirmed."""
        if not self.query_one(Checklist).complete:
            self.notify("first confirm every line", markup=False)
            return
        if self._opening:
            return
        self._opening = True
        batch = self.query_one("#batch", Input).value.strip()
        of = self.query_one("#batch-of", Input).value.strip()
        self.begin(batch, int(of) if of.isdecimal() and batch else 0)

    @work(thread=True, exclusive=True, group="begin")
    def begin(self, batch: str, of: int) -> None:
        """Open the machine."""
        try:
            run = self.session.begin(self.preview, batch, of)
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
