"""What a run asks of the person at the terminal, and what the person says to it."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Protocol

from windctl.cli.progress import Face
from windctl.cli.prompt import Prompt
from windctl.desk.numbers import signed_mm
from windctl.desk.words import BY, help_text, request_of
from windctl.errors import RunFailed, UsageError, WindctlError
from windctl.numbers import at_turn
from windctl.run.requests import (
    Clear,
    CountIs,
    End,
    Faster,
    Go,
    Hold,
    Note,
    Read,
    Request,
    Skip,
    Slower,
    TakeBack,
    Together,
    Unwind,
    ZeroContact,
)
from windctl.run.zero_seen import found_words

if TYPE_CHECKING:
    from windctl.desk.simulated_leads import SimulatedLeads
    from windctl.run.snapshot import Snapshot

Hand = Callable[[float], None]  # turns the spindle of a machine simulated here; negative unwinds

NO_POWER = "windctl cannot start, slow or stop this machine: it says where to stop, and you tell the turns."

_WHILE_IT_TURNS = (
    "Enter holds the spindle, and so does any line but slower, faster and note TEXT; "
    "Ctrl-C holds it and leaves."
)

CAUTIONS = """\
Before anything turns: guard closed, hands off, hair, sleeves and jewellery tucked away, no gloves.
Wear eye protection: fine wire whips when it breaks. Never touch the work while it turns.
Know where the hardware stop is; this program is not a safety function."""


class Asked(Protocol):
    """Something that takes requests."""

    def request(self, request: Request) -> None: ...


class Questions:
    """What the run asks, put to the person once each time, and what the person says."""

    def __init__(
        self,
        run: Asked,
        face: Face,
        prompt: Prompt | None,
        hand: Hand | None,
        leads: SimulatedLeads | None = None,
    ) -> None:
        self._run = run
        self._face = face
        self._prompt = prompt
        self._hand = hand
        self._leads = leads
        self._open: str | None = None
        self._put: tuple[object, ...] = ()
        self._answers = 0
        self._to_unwind = 0.0
        self._told_how_to_hold = False
        self.unanswerable: WindctlError | None = None

    def begin(self) -> None:
        """From now on the person may say something; whatever was typed before says nothing."""
        if self._prompt is not None:
            self._prompt.open_question()

    def consider(self, snapshot: Snapshot) -> None:
        """Ask what is newly asked, and pass on what was typed."""
        if snapshot.answers != self._answers:
            self._answers = snapshot.answers
            self._face.say(snapshot.answer)
        self._unwind(snapshot)
        if self._leads is not None:
            self._leads.mind(snapshot.zero)
        if snapshot.phase == "turning":
            self._put = ()  # at the next standstill everything is said again
        asks = None if snapshot.asks == "turn" else snapshot.asks  # that one ends the run by itself
        if asks != self._open:
            self._open = asks
            if self._open is not None:
                self._ask(snapshot)
                return
        if self._prompt is None:
            return
        if self._open is not None and _situation(snapshot) != self._put:
            self._put_question(snapshot)
        if snapshot.phase == "turning" and not self._told_how_to_hold:
            self._told_how_to_hold = True
            self._face.say(_WHILE_IT_TURNS)
        line = self._prompt.answer()
        if line is not None:
            self._typed(line, snapshot)

    def _ask(self, snapshot: Snapshot) -> None:
        if self._prompt is None:
            self._give_up(snapshot)
            return
        if snapshot.asks in ("go", "pass", "count") and not snapshot.virtual:
            self._face.say(CAUTIONS)
        if snapshot.asks == "count":
            self._face.say(NO_POWER)
        self._prompt.open_question()
        self._put_question(snapshot)

    def _put_question(self, snapshot: Snapshot) -> None:
        """What is asked, and how to answer where that is not what was said last."""
        same = bool(self._put) and self._put[0] == snapshot.asks
        self._put = _situation(snapshot)
        self._face.say(_question(snapshot, how=not same))

    def _give_up(self, snapshot: Snapshot) -> None:
        why = "nobody to ask"
        if snapshot.virtual and snapshot.begun and snapshot.asks == "clear":
            self._run.request(End("windctl", why))  # a trip that nobody looks to is the end of the coil
            return
        self.unanswerable = nobody_to_ask(snapshot)
        # A coil without a turn is no coil to go on with later.
        unwound = snapshot.turns <= 0
        self._run.request(End("windctl", why) if unwound else Hold("windctl", why, leave=True))

    def _typed(self, line: str, snapshot: Snapshot) -> None:
        if self._open is None:
            self._typed_unasked(line, snapshot)
            return
        if not line:
            return
        request = request_of(line)
        if line.lower() == "help":
            self._face.say(help_text())
        elif request is None:
            self._face.say(f"{line!r} is not understood; help lists the words.")
        elif isinstance(request, End) and snapshot.turns <= 0:
            self._face.say("There is no turn to end the coil with; Ctrl-C leaves.")
        elif isinstance(request, Go | Clear) and not _is_asked(request, snapshot):
            self._face.say(_question(snapshot))
        else:
            if isinstance(request, Unwind) and request.turns is not None:
                self._to_unwind = request.turns
            if isinstance(request, ZeroContact):
                request = ZeroContact(BY, simulated_hand=self._leads is not None)
            elif isinstance(request, Together) and self._leads is not None and snapshot.asks == "leads":
                self._leads.join()
            self._run.request(request)

    def _typed_unasked(self, line: str, snapshot: Snapshot) -> None:
        """While it turns, whatever is not for a turning spindle holds it: `stop` and `end` are typed in a
        hurry, and a hold harms nothing."""
        wanted = request_of(line)
        if isinstance(wanted, Slower | Faster | Note | TakeBack) or (
            (isinstance(wanted, Skip) and snapshot.zero is not None and snapshot.zero.wanted)
            or (snapshot.by_eye and isinstance(wanted, CountIs | Read))
        ):
            self._run.request(wanted)
        elif line.lower() == "help":
            self._face.say(help_text())
        elif snapshot.phase in ("turning", "stopping") and not isinstance(wanted, Go):
            self._run.request(Hold(BY, "held at the keyboard"))
            if line and not isinstance(wanted, Hold):
                what = "is not understood" if wanted is None else "is for a coil that stands"
                self._face.say(f"{line!r} {what}: holding.")

    def _unwind(self, snapshot: Snapshot) -> None:
        """At a simulated machine nobody turns the spindle back but we, once the run has agreed to it."""
        if self._hand is None or not self._to_unwind or not snapshot.drives_off or not snapshot.hands:
            return
        if snapshot.hands.startswith(f"unwind {self._to_unwind:g} turns"):
            self._hand(-self._to_unwind)
            self._to_unwind = 0.0


def _is_asked(request: Go | Clear, snapshot: Snapshot) -> bool:
    if isinstance(request, Go):
        return snapshot.asks in ("go", "pass") or snapshot.by_eye  # which says that nothing goes by it
    return snapshot.asks == "clear"


def _situation(snapshot: Snapshot) -> tuple[object, ...]:
    """What has to change before the same question is put again."""
    refused = snapshot.zero.refused if snapshot.zero is not None else ""
    at_the_wire = (snapshot.hands, snapshot.splices, snapshot.wire_ends_at)
    by_eye = (snapshot.turns, snapshot.stop_turn) if snapshot.by_eye else ()
    return (snapshot.asks, snapshot.drives_off, at_the_wire, refused, by_eye, _shift(snapshot))


def _shift(snapshot: Snapshot) -> float | None:
    return None if snapshot.guide_look is None else snapshot.guide_look.shift_mm


def _question(snapshot: Snapshot, *, how: bool = True) -> str:
    zero = snapshot.zero
    lines = [] if zero is None or not found_words(zero) else [f"{found_words(zero)}."]
    lines.append(f"{snapshot.says}.")
    if snapshot.wire_ends_at is not None:
        lines.append(
            f"If the wire broke, it ends near turn {at_turn(snapshot.wire_ends_at)}: splice goes back there."
        )
    if snapshot.asks == "place" and snapshot.guide_place_mm is not None:
        lines.append(f"Put the guide {snapshot.guide_place_mm:.2f} mm from where it began.")
    look = snapshot.guide_look
    if look is not None and snapshot.asks == "look":
        if look.shift_mm:
            lines.append(f"Nudging has come to {signed_mm(look.shift_mm)} from where the guide was put.")
        if look.apart:
            lines.append(look.apart)
    if snapshot.turns <= 0 and snapshot.asks == "go":
        start = "Type go and Enter to start; Ctrl-C leaves without turning anything."
        return "\n".join([*lines, start]) if zero is not None and zero.contact_off else start
    if how:
        lines.append(_ANSWERS[snapshot.asks or "go"])
    return "\n".join(lines)


_MORE = "help lists what else can be said; Ctrl-C leaves the coil open."
_ANSWERS = {
    "go": f"Type go and Enter to go on, or end and Enter to end the coil here; {_MORE}",
    "clear": f"Once that is put right, type clear and Enter; nothing turns by that. {_MORE}",
    "reading": "Bare the wire at the guide, never on the coil, and touch the contact; or measure by hand and "
    "type read, what the meter shows and, where no thermometer is fitted, how warm it is.\n"
    f"skip and Enter passes the check over; {_MORE}",
    "leads": "Type together and Enter once they are, and hold them still; skip and Enter leaves them as the "
    f"profile has them. {_MORE}",
    "pass": f"Type go and Enter to let the guide move; {_MORE}",
    "look": "Type seen and Enter if so. A little off: nudge 0.1 moves it 0.1 mm towards the far flange, "
    f"nudge -0.1 towards the start flange. Far off: hold and Enter, and put it right. {_MORE}",
    "place": f"Count the turns, then type turn, their number and Enter. {_MORE}",
    "count": "Then type turn, what the counter says and Enter, such as turn 3200; read takes a resistance. "
    f"{_MORE}",
}


def nobody_to_ask(snapshot: Snapshot) -> WindctlError:
    """Why the run cannot go on where nobody sits at the terminal."""
    if snapshot.virtual:
        return RunFailed(f"the run waits for {snapshot.asks!r} ({snapshot.says}) and nobody can be asked")
    return UsageError(
        f"this is a real machine: it turns only after {snapshot.asks!r} was typed at a terminal, "
        "so --no-input and input that is no terminal are refused; nothing was started"
    )
