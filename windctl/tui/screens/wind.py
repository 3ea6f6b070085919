"""The run screen: for a glance from two metres, with both hands on the wire."""

from __future__ import annotations

from time import monotonic
from typing import TYPE_CHECKING, ClassVar

from textual import work
from textual.app import ComposeResult
from textual.binding import Binding, BindingType
from textual.containers import Horizontal, Vertical
from textual.widgets import Static

from windctl.errors import WindctlError
from windctl.tui.guide_view import flanges
from windctl.tui.keymap import HOLD_KEY, key
from windctl.tui.outcome_words import after_words, outcome_words
from windctl.tui.pace import DIGITS_S, Pace
from windctl.tui.pictures.curve import Point
from windctl.tui.pictures.section import Filled
from windctl.tui.screens.wind_questions import WindQuestions
from windctl.tui.trail import Trail
from windctl.tui.view import Glance, Sound, bands, glance, shown_near, sound, still
from windctl.tui.widgets.bobbin_section import BobbinSection
from windctl.tui.widgets.curve import Curve
from windctl.tui.widgets.figures import Figures
from windctl.tui.widgets.flange_target import FlangeTarget
from windctl.tui.widgets.hand_target import HandTarget
from windctl.tui.widgets.news import News
from windctl.tui.widgets.state_band import StateBand
from windctl.tui.widgets.title_bar import TitleBar
from windctl.tui.widgets.turn_count import TurnCount
from windctl.tui.widgets.way import Way

if TYPE_CHECKING:
    from windctl.run.outcome import Outcome
    from windctl.run.runner import Ended
    from windctl.run.snapshot import Snapshot
    from windctl.tui.recipes import Preview
    from windctl.tui.session import Run, Session


_WHILE_IT_RUNS = (
    "hold",
    "go",
    "clear",
    "tell",
    "end",
    "note",
    "leave_open",
    "slower",
    "faster",
    "read",
    "count",
)
_OF_A_BOARD = ("hold", "go", "clear", "slower", "faster")  # have no meaning where the counter is read by eye
# The guide stands to be looked at: what cannot follow then makes room for the arrows.
_NOT_WHILE_LOOKING = ("go", "clear", "slower", "faster", "read", "end", "zero")


def _keys_of(snapshot: Snapshot) -> tuple[object, ...]:
    """What keys come and go with."""
    zero = snapshot.zero is not None and snapshot.zero.can
    leads = snapshot.asks == "leads"
    return (snapshot.can_take_back, shown_near(snapshot), leads, zero, snapshot.driven)


class WindScreen(WindQuestions):
    """Looks at the run eight times a second, draws as often as the line takes it; asks what is pressed."""

    ABOUT = (
        "The coil on the machine. Large: turns. The band: what the machine does, and what it does next. "
        "The bobbin fills as the wire lies, early turns dark, late turns light; pale is what it will be. "
        "The bell rings when it slows, stands, or trips."
    )
    BINDINGS: ClassVar[list[BindingType]] = [
        Binding(HOLD_KEY, "hold", "HOLD"),
        key("wind.go"),
        key("wind.clear", show=False),
        key("wind.seen"),
        key("wind.left"),
        key("wind.right"),
        key("wind.further_left"),
        key("wind.further_right"),
        key("wind.shift_left", show=False),
        key("wind.shift_right", show=False),
        key("wind.tell"),
        key("wind.slower"),
        key("wind.faster"),
        key("wind.count"),
        key("wind.read", show=False),
        key("wind.undo", show=False),
        key("wind.zero"),
        key("wind.together"),
        key("wind.end"),
        key("wind.leave"),
        key("wind.note"),
        key("wind.closer", show=False),
        key("wind.done"),
        key("recipes.again"),
    ]

    def __init__(self, session: Session, run: Run, preview: Preview | None = None) -> None:
        super().__init__(session, run)
        self.set_class(run.lay_by_hand is not None, "-by-hand")
        self.preview = preview
        self.trail = Trail(run.before)
        self.pace = Pace()
        self.latest: Snapshot | None = None
        self.glance: Glance | None = None
        self.ended: Ended | None = None
        self.outcome: Outcome | None = None
        self._facts = 0
        self._lines: list[tuple[str, str]] = []

    def heading(self) -> str:
        """Recipe, number, batch."""
        return self.coil.card.title

    def body(self) -> ComposeResult:
        """Band, figures on the left, drawings on the right."""
        yield StateBand(id="band")
        yield Way(id="way")
        yield Static("", id="alarm", markup=False)
        yield Static("", id="verdict", markup=False)
        yield FlangeTarget(id="look")
        with Horizontal(id="wind-body"):
            with Vertical(id="wind-left"):
                yield TurnCount(id="turns")
                yield Static("", id="under", markup=False)
                yield Figures(id="figures")
                yield News(id="news")
            with Vertical(id="wind-right"):
                yield Curve(id="curve")
                yield Curve(closer=True, id="closer")
                yield BobbinSection(id="section")
                yield HandTarget(self.coil.lay_by_hand, id="hand")

    def on_mount(self) -> None:
        """Begin to look."""
        self.set_interval(DIGITS_S, self.look)
        self.look()
        self.call_after_refresh(self.draw)

    # ------------------------------------------------------------ looking

    def look(self) -> None:
        """Texts and digits."""
        winding = self.coil.winding
        snapshot = winding.look()
        heard = sound(self.latest, snapshot)
        if heard is not None:
            self.app.bell()
        if heard is Sound.STANDS:
            self.session.tidy()
        if self.latest is not None and snapshot.answers != self.latest.answers:
            self.tell_answer(snapshot.answer)
        before, self.latest = self.latest, snapshot
        if self.ended is None:
            self.consider_count(snapshot)
            self.consider_reading(before, snapshot)
        if before is not None and _keys_of(before) != _keys_of(snapshot):
            self.refresh_bindings()
        if self.coil.leads is not None:
            self.coil.leads.mind(snapshot.zero)
        hand = self.coil.hand
        agreed = (snapshot.hands or "").startswith(f"unwind {self._to_unwind:g} turns")
        if self._to_unwind and hand is not None and agreed and snapshot.drives_off:
            hand(-self._to_unwind)  # nobody stands at a simulated spindle but we
            self._to_unwind = 0.0
        if self.ended is None and (ended := winding.wait(0.0)) is not None:
            self.ended = ended
            self.finish()
        covered = self.app.screen is not self
        due = self.pace.due(monotonic(), getattr(self.app, "backlog", 0), covered=covered)
        if due.texts and self.outcome is None:
            self.show(snapshot, figures=due.charts)
        if due.charts:
            self.draw()

    def show(self, snapshot: Snapshot, *, figures: bool = True) -> None:
        """Place what the view says. Figures that nobody can read so often come with the charts."""
        failed = ""
        if self.ended is not None and self.ended.left in ("failed", "unconfirmed"):
            failed = f"{self.ended.why}. What was wound is in the record; go on with it from the recipes (R)."
            if self.ended.left == "unconfirmed":
                failed = f"THE STOP IS NOT CONFIRMED: use the hardware stop. {failed}"
        seen = glance(snapshot, self.coil.card, failed)
        if self.glance is not None and not figures:
            seen = still(seen, self.glance)
        self.trail.add(Point(snapshot.turns, snapshot.ohm_20c_now, snapshot.finish_ohm, snapshot.finish_u95))
        self.query_one(HandTarget).show(snapshot.turns, snapshot.phase == "turning")
        self.show_guide(snapshot)
        if seen == self.glance:
            return
        before, self.glance = self.glance, seen
        self.query_one(StateBand).show(seen.look, seen.next)
        self.query_one(TurnCount).show(seen.digits)
        if before is None or before.under_digits != seen.under_digits:
            self.query_one("#under", Static).update(seen.under_digits, layout=False)
        self.query_one(Way).show(seen.part, seen.slow_part)
        self.query_one(Figures).show(seen.rows)
        self.query_one(TitleBar).show(self.heading(), seen.virtual or self.session.simulated)
        alarm = self.query_one("#alarm", Static)
        if str(alarm.content) != seen.alarm:
            alarm.update(seen.alarm)
            alarm.set_class(bool(seen.alarm), "-there")

    def show_guide(self, snapshot: Snapshot) -> None:
        """While the guide is shown before the first turn, nothing else matters."""
        seen = flanges(snapshot, self.coil.start_side)
        self.set_class(seen is not None, "-look")
        self.query_one(FlangeTarget).show(seen)

    def draw(self) -> None:
        """Charts, section and news."""
        winding, card = self.coil.winding, self.coil.card
        snapshot = winding.look()
        fan = bands(winding.outlook()) if self.ended is None else []
        for curve in self.query(Curve):
            if curve.display:
                curve.show(card.scale, self.trail.points, fan)
        self.query_one(BobbinSection).show(self.coil.growth, Filled(snapshot.turns, snapshot.guide_mm))
        from windctl.tui.telling import tell, when  # what it needs takes long to load

        facts = winding.facts(self._facts)
        if facts:
            self._facts += len(facts)
            cpt = self.coil.counts_per_turn
            self._lines += [(when(fact), words) for fact in facts if (words := tell(fact, cpt)) is not None]
            del self._lines[:-50]
            self.query_one(News).show(self._lines)

    # ------------------------------------------------------------ the end

    @work(thread=True, exclusive=True, group="finish")
    def finish(self) -> None:
        """Complete the record."""
        try:
            outcome = self.session.finish()
        except WindctlError as error:
            self.app.call_from_thread(self.unfinished, str(error))
        else:
            if outcome is not None:
                self.app.call_from_thread(self.finished, outcome)

    def unfinished(self, words: str) -> None:
        """The record could not be completed."""
        alarm = self.query_one("#alarm", Static)
        alarm.update(f"The record is not complete: {words}")
        alarm.set_class(True, "-there")

    def finished(self, outcome: Outcome) -> None:
        """Say how it went; Enter shows the record."""
        self.draw()
        if outcome.left == "turn wanted":
            self.back_for_the_turn(outcome)
            return
        self.outcome = outcome
        look, words = outcome_words(outcome, self.coil.truth)
        self.query_one(StateBand).show(*after_words(outcome, look))
        self.refresh_bindings()
        verdict = self.query_one("#verdict", Static)
        verdict.update(f"{look.glyph} {words}")
        verdict.styles.color = self.app.theme_variables.get(f"wc-{look.role}", "")
        verdict.set_class(True, "-there")
        self.app.bell()

    def back_for_the_turn(self, outcome: Outcome) -> None:
        """Back to the recipes, which ask for the turn."""
        self.app.pop_screen()
        ask = getattr(self.app.screen, "ask_turn", None)
        if ask is not None:
            ask(outcome.number, outcome.why)

    def action_done(self) -> None:
        """From the end of a coil to its record."""
        from windctl.tui.screens.coil import CoilScreen

        if self.outcome is None:
            return
        if self.outcome.summary.outcome == "open":
            self.app.pop_screen()
        else:
            self.app.switch_screen(CoilScreen(self.session, self.outcome.number))

    def action_again(self) -> None:
        """The next one, the same: back to the check list, which shows what is repeated."""
        from windctl.tui.screens.before import BeforeScreen

        if self.outcome is not None and self.preview is not None:
            card = self.coil.card
            self.app.switch_screen(BeforeScreen(self.session, self.preview, card.batch, card.of, again=True))

    def check_action(self, action: str, parameters: tuple[object, ...]) -> bool | None:
        """Keys of a running coil end with it."""
        running = self.outcome is None
        look = self.latest is not None and shown_near(self.latest)
        if action in ("seen", "nudge"):
            return running and look
        if action in _NOT_WHILE_LOOKING and look:
            return False
        if action == "together":
            return running and self.latest is not None and self.latest.asks == "leads"
        if action == "zero":
            zero = None if self.latest is None else self.latest.zero
            return running and zero is not None and zero.can
        if action == "undo":
            return running and self.latest is not None and self.latest.can_take_back
        if action in _OF_A_BOARD and self.coil.by_eye:
            return False
        if action in ("slower", "faster") and self.latest is not None and not self.latest.driven:
            return False  # somebody's own motor
        if action == "count":
            return running and self.coil.by_eye
        if action in _WHILE_IT_RUNS:
            return running
        if action in ("done", "again"):
            return not running
        return super().check_action(action, parameters)

    def action_closer(self) -> None:
        """On a small screen: the whole curve, or its finish from closer."""
        whole, closer = self.query_one("#curve", Curve), self.query_one("#closer", Curve)
        if whole.display and closer.display:
            return
        whole.display, closer.display = closer.display, whole.display
        self.call_after_refresh(self.draw)
