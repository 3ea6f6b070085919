"""What may be asked of a running coil from its screen: every key that a request follows from."""

from __future__ import annotations

from time import monotonic
from typing import TYPE_CHECKING

from textual.events import Key

from windctl.desk.words import request_of
from windctl.run.requests import (
    Clear,
    End,
    Faster,
    Go,
    Note,
    Nudge,
    Seen,
    Slower,
    TakeBack,
    Together,
    Unwind,
    ZeroContact,
)
from windctl.run.zero_seen import BACK_ON_THE_WIRE
from windctl.tui.dialogs.confirm import Confirm
from windctl.tui.dialogs.counter import CounterPrompt
from windctl.tui.dialogs.read import ReadingPrompt
from windctl.tui.dialogs.tell import Tell, said
from windctl.tui.dialogs.typed import Typed, Word
from windctl.tui.screens.room import Room

if TYPE_CHECKING:
    from windctl.run.snapshot import Snapshot
    from windctl.tui.session import Run, Session

_AGAIN_S = 5.0  # before the same words are said again

CAUTIONS = """\
Guard closed, hands off, hair, sleeves and jewellery tucked away, no gloves, eye protection on.
Never touch the work while it turns. Know where the hardware stop is: this program is no safety function."""


class WindQuestions(Room):
    """The coil on the machine, as far as somebody says something to it."""

    def __init__(self, session: Session, run: Run) -> None:
        super().__init__(session)
        self.coil = run
        self._to_unwind = 0.0
        self._answered, self._answered_at = "", 0.0
        self._prompted: float | None = None  # the check that the prompt was opened for
        self._told_at_ms: int | None = None  # when the counter was last believed

    def action_hold(self) -> None:
        """The spindle stands. The key acts before this is asked; a click on it comes here."""
        self.session.hold()

    def action_go(self) -> None:
        """Consent to a start, by a typed word."""
        snapshot = self.coil.winding.look()
        if snapshot.asks not in ("go", "pass"):
            self.notify("nothing waits for a go", markup=False)
            return
        words = CAUTIONS if not snapshot.virtual else "The simulated machine will turn."
        if snapshot.asks == "pass":
            cautions = f"\n\n{CAUTIONS}" if not snapshot.virtual else ""
            words = f"The guide goes to its far turn-round and back; nothing turns.{cautions}"
        elif snapshot.turns > 0:
            words = f"{snapshot.says}.\n\n{words}"
        if snapshot.zero is not None and snapshot.zero.contact_off:
            words = f"First {BACK_ON_THE_WIRE}.\n\n{words}"
        self.app.push_screen(Word("Go?", words, "go"), self._went)

    def _went(self, line: str | None) -> None:
        if line is not None:
            self.coil.winding.request(Go("operator"))

    def action_clear(self) -> None:
        """Clear a trip, once its cause was looked to."""
        snapshot = self.coil.winding.look()
        if snapshot.asks != "clear":
            self.notify("nothing is tripped", markup=False)
            return
        words = f"{snapshot.says}. Look to the cause at the machine first. Nothing turns by clearing."
        self.app.push_screen(Word("Clear the trip?", words, "clear"), self._cleared)

    def _cleared(self, line: str | None) -> None:
        if line is not None:
            self.coil.winding.request(Clear("operator"))

    def action_end(self) -> None:
        """End the coil where it stands."""
        turns = self.coil.winding.look().turns
        ends = f"It is held, and {self.coil.card.number} ends at about turn {turns:.0f}."
        if self.coil.by_eye:
            ends = f"{self.coil.card.number} ends at turn {turns:.0f}, the last one that was typed."
        words = (
            f"{ends} Its record is sealed; "
            "it cannot be gone on with. To go on later, leave it open instead (L)."
        )
        self.app.push_screen(Confirm("End the coil here?", words), self._end)

    def _end(self, yes: bool | None) -> None:
        if yes:
            self.coil.winding.request(End("operator", "ended by the operator"))

    def action_leave_open(self) -> None:
        """Hold, and leave the coil for later."""
        words = f"It is held, and {self.coil.card.number} stays open; R among the recipes goes on with it."
        self.app.push_screen(Confirm("Leave the coil open?", words), self._leave_open)

    def _leave_open(self, yes: bool | None) -> None:
        if yes:
            self.session.hold("left open by the operator", leave=True)

    def action_tell(self) -> None:
        """What happened at the wire, in the words of the vocabulary."""
        words = f"{self.coil.winding.look().says}\n\n{said()}"
        self.app.push_screen(Tell("What happened?", words, "a line"), self._told)

    def _told(self, line: str | None) -> None:
        request = None if line is None else request_of(line)
        if isinstance(request, End):
            self.action_end()
        elif isinstance(request, ZeroContact):
            self.action_zero()
        elif isinstance(request, Together):
            self.action_together()
        elif request is not None:
            if isinstance(request, Unwind):
                self._to_unwind = request.turns or 0.0
            self.coil.winding.request(request)

    def action_note(self) -> None:
        """Write something into the record."""
        self.app.push_screen(Typed("Note", "It goes into this coil's record.", "a line"), self._noted)

    def _noted(self, line: str | None) -> None:
        if line is not None:
            self.coil.winding.request(Note("operator", line))

    def action_zero(self) -> None:
        """Leads and contact are to be read by themselves, before the first turn."""
        self.coil.winding.request(ZeroContact("operator", simulated_hand=self.coil.leads is not None))

    def action_together(self) -> None:
        """The contact's leads are together; at a simulated machine nobody puts them so but we."""
        if self.coil.leads is not None and self.coil.winding.look().asks == "leads":
            self.coil.leads.join()
        self.coil.winding.request(Together("operator"))

    def action_seen(self) -> None:
        """The guide stands right where it is."""
        self.coil.winding.request(Seen("operator"))

    def action_nudge(self, mm: float) -> None:
        """The guide a little to the right as it is drawn, or to the left."""
        outwards = self.coil.start_side == "motor"  # the motor is drawn on the left
        self.coil.winding.request(Nudge("operator", mm if outwards else -mm))

    def action_slower(self) -> None:
        """A tenth of the planned pace less."""
        self.coil.winding.request(Slower("operator"))

    def action_faster(self) -> None:
        """A tenth more, at the most as planned."""
        self.coil.winding.request(Faster("operator"))

    # ------------------------------------------------------------ turns by eye

    def action_count(self, first: str = "") -> None:
        """What the counter says."""
        self.app.push_screen(CounterPrompt(self.coil.winding.look(), self.coil.winding.request, first))

    def on_key(self, event: Key) -> None:
        """A digit begins what the counter says. What was on its way here when a prompt was opened belongs to
        the prompt: of a number typed fast not one digit may be taken for another number."""
        typed, top = event.character or "", self.app.screen
        if isinstance(top, CounterPrompt | ReadingPrompt) and typed.isprintable():
            event.stop()
            top.more(typed)
        elif top is self and self.coil.by_eye and typed.isdecimal() and self.check_action("count", ()):
            event.stop()
            self.action_count(typed)

    def consider_count(self, snapshot: Snapshot) -> None:
        """Close the prompt once the run has believed what was typed."""
        top = self.app.screen
        if snapshot.told_at_ms not in (None, self._told_at_ms) and isinstance(top, CounterPrompt):
            top.dismiss(None)
        self._told_at_ms = snapshot.told_at_ms

    # ------------------------------------------------------------ readings by hand

    def action_read(self) -> None:
        """A reading by hand; where the drives are on, they go off first."""
        snapshot = self.coil.winding.look()
        stands = snapshot.asks is not None or snapshot.check is not None or snapshot.by_eye
        if snapshot.turns <= 0 or not stands:
            self.notify("a coil is read once it has turns and stands", markup=False)
            return
        self._prompted = None if snapshot.check is None else snapshot.check.turn
        self.app.push_screen(ReadingPrompt(snapshot, self.coil.winding.request))

    def action_undo(self) -> None:
        """The reading typed last was a mistake."""
        self.coil.winding.request(TakeBack("operator"))

    def consider_reading(self, before: Snapshot | None, snapshot: Snapshot) -> None:
        """Open the prompt once where the run asks for a reading, show answers in it, and close it when the
        reading is there."""
        check, top = snapshot.check, self.app.screen
        if isinstance(top, ReadingPrompt):
            taken = snapshot.can_take_back and before is not None and not before.can_take_back
            if snapshot.by_eye and before is not None:  # where a turn can be taken back already
                taken = snapshot.readings_used > before.readings_used
            was_asked = before is not None and before.check is not None
            if check is None and (taken or was_asked):
                top.dismiss(None)
            else:
                top.look(snapshot)
        elif check is None:
            self._prompted = None
        elif snapshot.drives_off and self._prompted != check.turn and top is self:
            self.action_read()

    def tell_answer(self, words: str) -> None:
        """What the run says to a request."""
        top, snapshot = self.app.screen, self.coil.winding.look()
        not_believed = isinstance(top, CounterPrompt) and snapshot.told_at_ms == self._told_at_ms
        reads = isinstance(top, ReadingPrompt) and (snapshot.check is not None or snapshot.by_eye)
        if isinstance(top, CounterPrompt | ReadingPrompt) and (reads or not_believed):
            top.tell(words)
        elif words != self._answered or monotonic() - self._answered_at > _AGAIN_S:  # a key may be held down
            self._answered, self._answered_at = words, monotonic()
            self.notify(words, markup=False)
