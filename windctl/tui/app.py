"""The frame: themes, keys that work everywhere, rooms, and leaving without leaving anything turning."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import TYPE_CHECKING, ClassVar

from textual import events
from textual.app import App, SystemCommand
from textual.binding import BindingType
from textual.command import CommandPalette
from textual.driver import Driver
from textual.screen import Screen
from textual.widgets import Input, TextArea

from windctl.tui import keymap
from windctl.tui.dialogs.confirm import Confirm
from windctl.tui.dialogs.help import Help
from windctl.tui.keymap import key
from windctl.tui.screens import rooms
from windctl.tui.screens.recipes import RecipesScreen
from windctl.tui.theme import DARK, LIGHT
from windctl.tui.urgent import Held, with_urgent_keys

if TYPE_CHECKING:
    from windctl.run.outcome import Outcome
    from windctl.tui.session import Run, Session

MOVING = ("turning", "stopping")
UNCONFIRMED = "THE STOP IS NOT CONFIRMED: use the hardware stop."


class WindctlApp(App[int], inherit_bindings=False):
    """The terminal interface of one sitting."""

    TITLE = "windctl"
    CSS_PATH = "windctl.tcss"
    COMMAND_PALETTE_BINDING = "f4"
    HORIZONTAL_BREAKPOINTS = [  # noqa: RUF012 - declared so by the base class
        (0, "-narrow"),
        (110, "-wide"),
    ]
    VERTICAL_BREAKPOINTS = [  # noqa: RUF012
        (0, "-low"),
        (34, "-tall"),
    ]
    BINDINGS: ClassVar[list[BindingType]] = [
        key("help", show=True),
        key("recipes", show=False),
        key("coils"),
        key("spools", show=False),
        key("machine", show=False),
        key("light", show=False),
        key("quit", show=False),
        key("leave", show=False),
    ]

    def __init__(
        self, session: Session, keys: Mapping[str, object] | None = None, *, light: bool = False
    ) -> None:
        super().__init__()
        self.session = session
        self._wanted_keys = keys or {}
        self.farewell = ""
        self.register_theme(DARK)
        self.register_theme(LIGHT)
        self.theme = LIGHT.name if light else DARK.name

    def get_driver_class(self) -> type[Driver]:
        """The platform's driver, with the hold key ahead of everything."""
        return with_urgent_keys(super().get_driver_class())

    def on_mount(self) -> None:
        """Keys, and the first room."""
        good, wrong = keymap.checked(self._wanted_keys)
        self.set_keymap(good)
        self.push_screen(RecipesScreen(self.session))
        for problem in wrong:
            self.notify(problem, title="settings", severity="warning", markup=False)

    # ------------------------------------------------------------ hold

    def hold_at_once(self) -> None:
        """Ask the spindle to stand; from any thread, at any time."""
        self.session.hold()

    def space_holds(self) -> bool:
        """Space holds while a coil turns or its guide is shown, and nothing is being typed."""
        if isinstance(self.focused, Input | TextArea):
            return False
        run, bench = self.session.run, self.session.bench
        if run is None:
            return bench is not None and bench.look().turning
        snapshot = run.winding.look()
        return snapshot.phase in MOVING or snapshot.guide_look is not None

    async def on_event(self, event: events.Event) -> None:
        """The hold keys come before every binding, in every screen and dialog."""
        if isinstance(event, events.Key) and not event.is_forwarded:
            urgent = event.key == keymap.HOLD_KEY or (event.key == keymap.SPACE and self.space_holds())
            if urgent:
                if not isinstance(event, Held):
                    self.hold_at_once()
                if self.session.run is None and self.session.bench is None:
                    self.notify("nothing is being wound", markup=False)
                return
        await super().on_event(event)

    @property
    def backlog(self) -> int:
        """Pieces of output that the terminal has not taken yet."""
        return getattr(self._driver, "backlog", 0)

    # ------------------------------------------------------------ rooms

    def action_room(self, name: str) -> None:
        """Go to another room; a coil being wound stays where it is beneath."""
        if self.session.checking:
            self.notify("the machine is being checked: F8 stops that first", markup=False)
        elif name == "recipes":
            if self.session.run is not None:
                self.notify("a coil is on the machine: first finish it or leave it open", markup=False)
            else:
                self.pop_to_recipes()
        else:
            self._to_room(name)

    def _to_room(self, name: str) -> None:
        kind = rooms.room_of(name)
        while not isinstance(self.screen, kind) and self._goes_away(self.screen):
            self.pop_screen()
        if not isinstance(self.screen, kind):
            self.push_screen(kind(self.session))

    @staticmethod
    def _goes_away(screen: Screen[object]) -> bool:
        """A room that another one takes the place of; the first room and a coil on the machine stay."""
        return isinstance(screen, rooms.Between) and not isinstance(screen, RecipesScreen)

    def pop_to_recipes(self) -> None:
        """Back to the first room."""
        while len(self.screen_stack) > 1 and not isinstance(self.screen, RecipesScreen):
            self.pop_screen()

    def action_help(self) -> None:
        """What this screen is for, and its keys."""
        if not isinstance(self.screen, Help):
            self.push_screen(Help(self.screen))

    def action_switch_light(self) -> None:
        """Dark to light and back."""
        self.theme = DARK.name if self.theme == LIGHT.name else LIGHT.name

    def get_system_commands(self, screen: Screen[object]) -> Iterable[SystemCommand]:
        """What the command palette offers besides the screen's own keys."""
        yield SystemCommand("Hold", "the spindle stands; F8 does it everywhere", self.hold_at_once)
        yield SystemCommand("Recipes", "choose what to wind", lambda: self.action_room("recipes"))
        for name, words in rooms.ABOUT.items():
            yield SystemCommand(name.capitalize(), words, lambda name=name: self.action_room(name))
        yield SystemCommand("Help", "what this screen is for, and its keys", self.action_help)
        yield SystemCommand("Light or dark", "change the colours", self.action_switch_light)
        yield SystemCommand("Picture of this screen", "as an SVG file beside you", self._picture)
        yield SystemCommand("Leave", "close windctl", self.action_leave)
        for binding in (active.binding for active in screen.active_bindings.values()):
            if binding.id and "." in binding.id:
                yield SystemCommand(
                    binding.description,
                    f"key {self.get_key_display(binding)}",
                    lambda action=binding.action: screen.call_later(screen.run_action, action),
                )

    def action_command_palette(self) -> None:
        """What can be done here, by its name; a coil goes on beneath."""
        if not isinstance(self.screen, CommandPalette):
            self.push_screen(CommandPalette(placeholder="what is to be done"))

    def _picture(self) -> None:
        path = self.save_screenshot(path=str(Path.cwd()))
        self.notify(path, title="written", markup=False)

    # ------------------------------------------------------------ leaving

    def action_leave(self) -> None:
        """Close; where a coil is being wound, ask first, then hold and record."""
        run = self.session.run
        if run is None:
            self.run_worker(self._leave, thread=True, name="leave", exit_on_error=True)
        elif not isinstance(self.screen, Confirm):
            self.push_screen(Confirm("Leave windctl?", leaving_words(run)), self._answered_leave)

    def _answered_leave(self, yes: bool | None) -> None:
        if yes:
            self.run_worker(self._leave, thread=True, name="leave", exit_on_error=True)

    def _leave(self) -> None:
        run = self.session.run
        stands = self.session.close_bench()
        outcome = self.session.leave("left by the operator")
        self.farewell = farewell(run, outcome) if stands else UNCONFIRMED
        self.call_from_thread(self.exit, 0 if self.farewell != UNCONFIRMED else 1)


def leaving_words(run: Run) -> str:
    """What leaving means now."""
    snapshot = run.winding.look()
    first = "The coil turns. It will be held first." if snapshot.phase in MOVING else _stands(run)
    return (
        f"{first} {run.card.number} stays open at turn {snapshot.turns:.0f} and can be gone on with later, "
        "here or with `windctl resume`."
    )


def farewell(run: Run | None, outcome: Outcome | None) -> str:
    """What is said on the way out."""
    if run is None or outcome is None:
        return ""
    if outcome.left == "unconfirmed":
        return UNCONFIRMED
    if outcome.summary.outcome == "open":
        return f"{_stands(run)} {outcome.number} stays open: windctl resume {outcome.number}"
    return ""


def _stands(run: Run) -> str:
    """What is known of the spindle; where there is no board, nothing."""
    return "Stop your own motor." if run.by_eye else "The spindle stands."
