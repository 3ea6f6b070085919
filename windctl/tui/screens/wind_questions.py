"""What may be asked of a running coil from its screen: every key that a request follows from."""

from __future__ import annotations

from typing import TYPE_CHECKING

from windctl.desk.words import request_of
from windctl.run.requests import Clear, End, Faster, Go, Note, Seen, Slower, TakeBack, Unwind
from windctl.tui.dialogs.confirm import Confirm
from windctl.tui.dialogs.read import ReadingPrompt
from windctl.tui.dialogs.tell import Tell, said
from windctl.tui.dialogs.typed import Typed, Word
from windctl.tui.screens.room import Room

if TYPE_CHECKING:
    from windctl.run.snapshot import Snapshot
    from windctl.tui.session import Run, Session

CAUTIONS = """\
Guard closed, hands off, hair, sleeves and jewellery tucked away, no gloves, eye protection on.
Never touch the work while it turns. Know where the hardware stop is: this program is no safety function."""


class WindQuestions(Room):
    """The coil on the machine, as far as somebody says something to it."""

    def __init__(self, session: Session, run: Run) -> None:
        super().__init__(session)
        self.coil = run
        self._to_unwind = 0.0
        self._prompted: float | None = None  # the check that the prompt was opened for

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
            words = f"The guide goes to its far turn-round and back; nothing turns.\n\n{CAUTIONS}"
        elif snapshot.turns > 0:
            words = f"{snapshot.says}.\n\n{words}"
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
        words = (
            f"It is held, and {self.coil.card.number} ends at about turn {turns:.0f}. Its record is sealed; "
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

    def action_seen(self) -> None:
        """The guide stands right where it is."""
        self.coil.winding.request(Seen("operator"))

    def action_slower(self) -> None:
        """A tenth of the planned pace less."""
        self.coil.winding.request(Slower("operator"))

    def action_faster(self) -> None:
        """A tenth more, at the most as planned."""
        self.coil.winding.request(Faster("operator"))

    # ------------------------------------------------------------ readings by hand

    def action_read(self) -> None:
        """A reading by hand; where the drives are on, they go off first."""
        snapshot = self.coil.winding.look()
        if snapshot.turns <= 0 or (snapshot.asks is None and snapshot.check is None):
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
        top = self.app.screen
        if isinstance(top, ReadingPrompt) and self.coil.winding.look().check is not None:
            top.tell(words)
        else:
            self.notify(words, markup=False)
