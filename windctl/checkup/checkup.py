"""The check-up itself: runs the steps' courses, one after the other, over one conversation.

Whoever drives it calls `receive` with what came and writes what `advance` gives, looks at `question`, and
calls `answer` or `leave_out`. `results` grows; `done` says when it is over, with the drives off.
"""

from __future__ import annotations

from collections.abc import Callable, Generator, Iterator, Sequence

from windctl.checkup.scene import Scene
from windctl.checkup.step import TYPED, Act, Fault, LeftOut, Need, Question, Result, Seen, Step, Verdict
from windctl.profile.model import MachineProfile
from windctl.protocol.conversation import Conversation
from windctl.protocol.messages import BoardMessage, Capability
from windctl.protocol.picture import BoardPicture
from windctl.protocol.wants import Wants

CAUTIONS = """\
The next steps power the drives, turn the spindle slowly and move the guide.
No wire and no bobbin on the machine, the guide in the middle of its way, the guard closed.
Hands, hair, sleeves and jewellery away, no gloves; hands in only when a step asks for one.
The hardware stop within reach and tried: it must cut the drives' power with this computer off.
This program is not a safety function. Your local codes come first."""


class Checkup:
    """One machine's check-up. `steps` in their safe order: those that power the drives come last."""

    def __init__(
        self,
        profile: MachineProfile,
        steps: Sequence[Step],
        nonces: Callable[[], int] | Iterator[int],
        *,
        reference_ohm: float | None = None,
    ) -> None:
        self._talk = Conversation(nonces)
        self._scene = Scene(profile, self._talk.board, reference_ohm=reference_ohm)
        self._course = self._all(tuple(steps))
        self._need: Need | None = None
        self._since: float | None = None
        self._came: list[BoardMessage] = []
        self._answer: str | None = None
        self._passed_over = False
        self._stopping = False
        self._ending = False  # what was to be stopped is stopped: the way to drives off runs undisturbed
        self.step: Step | None = None
        self.results: list[Result] = []
        self.done = False

    # ------------------------------------------------------------ for whoever drives it

    @property
    def question(self) -> Question | None:
        """What is asked of the person now."""
        return self._need.question if self._need is not None else None

    def answer(self, text: str) -> None:
        """The person's answer to a question that is typed."""
        self._answer = text

    def leave_out(self) -> None:
        """The person passes over what is asked."""
        self._passed_over = True

    def stop(self) -> None:
        """Hold, take the drives off, and end: what was not reached is left out."""
        self._stopping = True

    @property
    def board(self) -> BoardPicture:
        """The board as last heard of."""
        return self._talk.board

    def receive(self, data: bytes, now: float) -> list[BoardMessage]:
        """Bytes from the board; what came in them."""
        came = self._talk.receive(data, now)
        self._came += came
        return came

    def advance(self, now: float) -> bytes:
        """Goes on as far as it can; what to write. Raises what the conversation raises."""
        if self._need is None and not self.done:
            self._next(None, now)
        while self._need is not None and (seen := self._look(self._need, now)) is not None:
            self._next(seen, now)
        wants = self._need.wants if self._need is not None else Wants()
        return self._talk.advance(wants, now)

    # ------------------------------------------------------------ the course

    def _look(self, need: Need, now: float) -> Seen | None:
        """What the waiting has come to, if it has."""
        assert self._since is not None
        picture = self._scene.picture = self._talk.board
        met = need.until(picture, self._came)
        answer, self._answer = self._answer, None
        over = now - self._since >= need.within_s and (
            need.question is None or need.question.act not in TYPED
        )
        passed, self._passed_over = self._passed_over, False
        if need.question is not None and need.question.act in TYPED and answer is not None:
            met = True
        if not (met or over or passed or (self._stopping and not self._ending)):
            return None
        return Seen(picture, tuple(self._came), now, met, answer or "")

    def _next(self, seen: Seen | None, now: float) -> None:
        if seen is not None:
            self._came = []
        self._since = now
        self._answer = None
        try:
            self._need = next(self._course) if seen is None else self._course.send(seen)
        except StopIteration:
            self._need = None
            self.done = True

    def _all(self, steps: tuple[Step, ...]) -> Generator[Need, Seen, None]:
        consented: bool | None = None
        for step in steps:
            self.step = step
            if self._stopping:
                self._ending = True
                self.results.append(Result(step.key, step.title, Verdict.LEFT_OUT, "ended before"))
                continue
            missing = step.needs & ~(self._talk.board.capabilities & fitted_in(self._scene.profile))
            if missing:
                names = ", ".join(bit.name.lower() for bit in Capability if bit & missing and bit.name)
                self.results.append(Result(step.key, step.title, Verdict.NOT_FITTED, names))
                continue
            if step.powered and consented is None:
                consented = yield from self._consent()
            if step.powered and not consented:
                self.results.append(
                    Result(step.key, step.title, Verdict.LEFT_OUT, "no consent to the drives")
                )
                continue
            self.results.append((yield from self._one(step)))
        self.step = None
        self._ending = True
        if self._talk.board.greeted:
            yield from self._leave()

    def _consent(self) -> Generator[Need, Seen, bool]:
        text = f"{CAUTIONS}\nType go and Enter if all of this is so; anything else leaves these steps out."
        try:
            seen = yield from self._scene.ask(Question(Act.CONSENT, text), Wants(beat=True))
        except LeftOut:
            return False
        return seen.answer.strip().lower() == "go"

    def _one(self, step: Step) -> Generator[Need, Seen, Result]:
        """A step and what it comes to; one that powered something leaves the drives off."""
        try:
            result = yield from step.course(self._scene)
            if step.powered:
                yield from self._scene.drives_off()
        except LeftOut as why:
            result = Result(step.key, step.title, Verdict.LEFT_OUT, str(why))
        except Fault as fault:
            verdict = Verdict.LEFT_OUT if self._stopping else Verdict.FAULT
            result = Result(step.key, step.title, verdict, fault.seen, advice=fault.advice)
        else:
            return result
        self._ending = self._stopping
        if step.powered and not self._stopping:
            yield from self._leave()
        return result

    def _leave(self) -> Generator[Need, Seen, None]:
        """Drives off, or said that they are not."""
        try:
            yield from self._scene.drives_off()
        except Fault as fault:
            seen = f"the drives could not be taken off: {fault.seen}"
            self.results.append(Result("end", "End", Verdict.FAULT, seen, advice="press the hardware stop"))


def fitted_in(profile: MachineProfile) -> Capability:
    """What the profile says the machine has."""
    fitted = Capability.THERMOMETER
    for has, bit in (
        (profile.spindle.drive == "step", Capability.DRIVE_STEP),
        (profile.guide.kind == "step", Capability.GUIDE_STEP),
        (profile.spindle.index, Capability.INDEX),
        (profile.readings.by_contact, Capability.CONTACT),
        (profile.tension.sensor, Capability.TENSION),
        (profile.pedal, Capability.PEDAL),
    ):
        if has:
            fitted |= bit
    return fitted
