"""The machine between coils: its inputs as they are, and the check of board and machine."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

from textual import on, work
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Horizontal, Vertical
from textual.widgets import DataTable, Input, Static

from windctl.desk.checking import changes
from windctl.desk.machines import known_machines
from windctl.errors import WindctlError
from windctl.tui import machine_view
from windctl.tui.dialogs.choose import Choose
from windctl.tui.dialogs.confirm import Confirm
from windctl.tui.dialogs.say import Say
from windctl.tui.keymap import HOLD_KEY, key
from windctl.tui.screens.between import Between
from windctl.tui.widgets.lamps import Lamps
from windctl.tui.widgets.state_band import StateBand
from windctl.tui.widgets.table import Table
from windctl.tui.widgets.title_bar import TitleBar

if TYPE_CHECKING:
    from windctl.desk.machine_look import Looked
    from windctl.tui.session import Session

_LOOK_S = 0.1


class MachineScreen(Between):
    """Looks ten times a second. Nothing is powered before a go was typed into this screen."""

    ABOUT = (
        "What the board sees, now: open the guard, press the stop, and watch the line change. C checks board "
        "and machine step by step; U only what powers no drive; Enter the step under the cursor. Before the "
        "drives are powered you type go. F8 stops the spindle and takes the drives off at any time. K keeps "
        "what was calibrated, after showing the difference."
    )
    HERE = "machine"
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding(HOLD_KEY, "hold", "HOLD"),
        key("machine.open"),
        key("machine.check"),
        key("machine.still"),
        key("machine.one", show=False),
        key("machine.skip"),
        key("machine.keep"),
        key("machine.other"),
    ]

    def __init__(self, session: Session) -> None:
        super().__init__(session)
        self.looked: Looked | None = None
        self._answering = False

    def body(self) -> ComposeResult:
        """Band, inputs on the left, the check on the right, what is asked below."""
        yield StateBand(id="machine-band")
        with Horizontal(id="machine-body"):
            with Vertical(id="machine-left"):
                yield Static(self.machine_line(), id="machine-name", classes="heading", markup=False)
                yield Lamps(id="lamps")
            with Vertical(id="machine-right"):
                yield Table(id="check-table")
        yield Static("", id="check-asked", markup=False)
        yield Input(id="check-answer", compact=True)
        yield Static("", id="check-about", markup=False)

    def machine_line(self) -> str:
        """Which machine it is."""
        return f"{self.session.profile.name}, bench {self.session.profile.bench}"

    def on_mount(self) -> None:
        """A simulated machine is looked at at once; a real port is opened when asked to."""
        table = self.query_one(Table)
        table.head(machine_view.columns(self.app.size.width))
        table.focus()
        if self.session.run is None and self.session.simulated:
            self.session.open_bench()
        self.set_interval(_LOOK_S, self.look)
        self.look()

    def on_unmount(self) -> None:
        """Give the port back."""
        self.run_in_thread(self.session.close_bench)

    def run_in_thread(self, what: object) -> None:
        """Without waiting for it: a check was ended before, or the program ends."""
        self.app.run_worker(what, thread=True, group="bench")  # type: ignore[arg-type]  # a plain function

    def repaint(self) -> None:
        """Other colours, or another width."""
        self.looked = None
        self.look()

    # ------------------------------------------------------------ looking

    def look(self) -> None:
        """Show the board as it is."""
        bench = self.session.bench
        if bench is None:
            self.show(None)
        else:
            self.show(bench.look())

    def show(self, looked: Looked | None) -> None:
        """Place one moment."""
        if looked is None:
            words = self.nothing_open()
            self.query_one(StateBand).show(*machine_view.not_open(words))
            return
        before, self.looked = self.looked, looked
        virtual = looked.board is not None and looked.board.virtual
        self.query_one(TitleBar).show("Machine", virtual or self.session.simulated)
        if before == looked:
            return
        self.query_one(StateBand).show(*machine_view.band(looked))
        self.query_one(Lamps).show(machine_view.lamps(looked.board))
        table = self.query_one(Table)
        if before is None or (before.results, before.step, before.steps, before.checking) != (
            looked.results, looked.step, looked.steps, looked.checking,
        ):  # fmt: skip
            width = self.app.size.width
            table.head(machine_view.columns(width))
            table.fill(machine_view.rows(looked, width))
            if looked.checking and looked.step in table.rows:
                table.move_cursor(row=table.get_row_index(looked.step))
            self.refresh_bindings()
            self.tell()
        if before is None or before.asked != looked.asked:
            self.ask()

    def nothing_open(self) -> str:
        """Why no board is looked at."""
        if self.session.run is not None:
            return "a coil is on the machine: its own screen shows it"
        return "O opens the port and looks; nothing is powered by that"

    @on(DataTable.RowHighlighted)
    def tell(self) -> None:
        """How the check went, and more on the step under the cursor."""
        if self.looked is None:
            return
        about = machine_view.about(self.looked, self.query_one(Table).chosen)
        summed_up = machine_view.summed_up(self.looked)
        words = "\n".join(line for line in (summed_up, about) if line)
        self.query_one("#check-about", Static).update(words)

    def ask(self) -> None:
        """Put what is asked, and a line to type where one is wanted."""
        asked = self.looked.asked if self.looked is not None else None
        line, words = self.query_one("#check-answer", Input), self.query_one("#check-asked", Static)
        words.update("" if asked is None else asked.text)
        words.set_class(asked is not None, "-there")
        line.set_class(asked is not None and asked.typed, "-there")
        line.value = ""
        if asked is not None and asked.typed:
            line.placeholder = "type go" if asked.consent else f"{asked.unit}   (s leaves it out)".strip()
            line.focus()
        elif line.has_focus:
            self.query_one(Table).focus()

    # ------------------------------------------------------------ asking for something

    def action_open(self) -> None:
        """Open the port, or try again."""
        if self.session.run is not None:
            self.notify("a coil is on the machine", markup=False)
        elif self.session.checking:
            self.notify("it is open", markup=False)
        else:
            self.looked = None
            self.open_anew()

    @work(thread=True, exclusive=True, group="bench")
    def open_anew(self) -> None:
        """Close what was open, and look."""
        self.session.open_bench()

    def action_check(self) -> None:
        """All steps."""
        self.check()

    def action_still(self) -> None:
        """The steps that power no drive."""
        self.check(powered=False)

    @on(DataTable.RowSelected)
    def action_one(self) -> None:
        """The step under the cursor, behind the greeting."""
        chosen = self.query_one(Table).chosen
        if chosen is not None:
            self.check((chosen,))

    def check(self, keys: tuple[str, ...] = (), *, powered: bool = True) -> None:
        """Begin a check."""
        bench = self.session.bench
        if bench is None or self.looked is None or self.looked.link != "live":
            self.notify("first open the port: O", markup=False)
        elif self.looked.checking:
            self.notify("a check is running: F8 stops it", markup=False)
        else:
            bench.check(keys, powered=powered)

    @on(Input.Submitted, "#check-answer")
    def answered(self, event: Input.Submitted) -> None:
        """What was typed."""
        bench = self.session.bench
        if bench is None:
            return
        if event.value.strip().lower() == "s":
            bench.leave_out()
        else:
            bench.answer(event.value)
        event.input.value = ""

    def action_hold(self) -> None:
        """The key acts before this is asked; a click on it comes here."""
        self.session.hold()

    def action_skip(self) -> None:
        """Pass over what is asked."""
        if self.session.bench is not None:
            self.session.bench.leave_out()

    def action_back(self) -> None:
        """Where one came from; a check is stopped first."""
        if self.session.checking:
            self.session.hold()
            self.notify("the check is stopped; Escape once more leaves", markup=False)
        else:
            self.app.pop_screen()

    def check_action(self, action: str, parameters: tuple[object, ...]) -> bool | None:
        """Only what can be done is offered."""
        looked = self.looked
        checking = looked is not None and looked.checking
        match action:
            case "open":
                return looked is None or looked.link in ("closed", "lost")
            case "check" | "still" | "one" | "other":
                return not checking
            case "skip" | "hold":
                return checking
            case "keep":
                return looked is not None and bool(looked.calibration) and not checking
            case _:
                return super().check_action(action, parameters)

    # ------------------------------------------------------------ keeping and choosing

    def action_keep(self) -> None:
        """Show what would change in the profile, and ask."""
        if self.looked is None or not self.looked.calibration:
            return
        values = self.looked.calibration
        differing = changes(self.session.profile, values)
        if not differing:
            self.notify("the profile says so already", markup=False)
            return
        file = self.session.profile_file()
        words = machine_view.changes_words(differing)
        if file is None:
            why = "The built-in machine has no profile file to write this into:"
            self.app.push_screen(Say("What was calibrated", f"{why}\n\n{words}"))
            return
        wanted = {one.key: one.after for one in differing}

        def kept(yes: bool | None) -> None:
            if yes:
                self.keep(wanted)

        self.app.push_screen(Confirm("Keep the calibration?", f"{words}\n\nin {file}"), kept)

    @work(thread=True, exclusive=True, group="calibration")
    def keep(self, values: dict[str, float | int]) -> None:
        """Write it into the profile."""
        try:
            words = f"✔ written into {self.session.keep_calibration(values)}"
        except WindctlError as error:
            words = f"✖ not written: {error}"
        self.app.call_from_thread(self.notify, words, markup=False)

    def action_other(self) -> None:
        """Which machines there are; one of them is taken."""
        try:
            known = known_machines()
        except WindctlError as error:
            self.app.push_screen(Say("Machines", str(error)))
            return
        lines = [(one.name, machine_view.machine_line(one)) for one in known]
        words = "The machine of this sitting, marked. Another one is looked at and planned for from then on."
        self.app.push_screen(Choose("Machines", words, lines, self.session.machine_name), self._took)

    def _took(self, name: str | None) -> None:
        if name is None or name == self.session.machine_name:
            return
        if self.session.run is not None or self.session.checking:
            self.notify("not while the machine is at work", markup=False)
            return
        self.take(name)

    @work(thread=True, exclusive=True, group="bench")
    def take(self, name: str) -> None:
        """Another machine, from now on."""
        try:
            self.session.take_machine(name)
        except WindctlError as error:
            self.app.call_from_thread(self.app.push_screen, Say("It cannot be taken", str(error)))
            return
        if self.session.simulated:
            self.session.open_bench()
        self.app.call_from_thread(self.taken)

    def taken(self) -> None:
        """Show the other one."""
        self.looked = None
        self.query_one(Lamps).show(())
        self.query_one("#machine-name", Static).update(self.machine_line())
        self.on_screen_resume()
        self.refresh_bindings()
