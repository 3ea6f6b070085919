"""What the courses of the steps share: the profile's figures, and the ways to get a board somewhere.

Each way is a generator that yields `Need`s. Every movement takes a consent of its own from the permission
that the board shows at that moment; the conversation spends it once.
"""

from __future__ import annotations

from binascii import crc_hqx
from collections.abc import Callable, Generator
from dataclasses import dataclass, replace

from windctl.checkup.step import Act, Fault, LeftOut, Need, Question, Seen
from windctl.profile.model import MachineProfile
from windctl.protocol.messages import (
    BoardMessage,
    Capability,
    InputBit,
    Reading,
    Refused,
    Setup,
    State,
    Status,
    Trip,
)
from windctl.protocol.picture import BoardPicture
from windctl.protocol.wants import Datum, GuidePlace, Permission, Sampling, Wants

Waiting = Generator[Need, Seen, Seen]
Until = Callable[[BoardPicture, list[BoardMessage]], bool]

HAND_S = 90.0  # a person may take so long to do what is seen on the line
COMMAND_S = 4.0  # a board takes and shows any command well within this
STAND_S = 12.0  # Setup allows no braking longer than ten seconds
_TEST_RPM = 60.0
_TEST_TURNS_MAX = 100_000


@dataclass(slots=True)
class Scene:
    """One check-up of one machine. `picture` is the board as last seen."""

    profile: MachineProfile
    picture: BoardPicture
    reference_ohm: float | None = None
    zero_ohm: float | None = None  # leads and contact, once measured
    token: int = 0

    # ------------------------------------------------------------ figures

    @property
    def turn(self) -> int:
        """Counts per turn."""
        return self.profile.spindle.counts_per_turn

    @property
    def steps(self) -> int:
        """Motor steps per turn."""
        return self.profile.spindle.steps_per_turn

    @property
    def pace(self) -> int:
        """Of the test, steps/s: slow enough to see, never above the machine's own limit."""
        return max(1, round(min(_TEST_RPM, self.profile.spindle.max_rpm) * self.steps / 60))

    @property
    def decel(self) -> int:
        """steps/s2, as the profile has it."""
        return max(100, round(self.profile.spindle.decel_rpm_per_s * self.steps / 60))

    @property
    def guide_span(self) -> int:
        """Guide steps that the test moves either way: 5 mm, or a quarter of its travel."""
        guide = self.profile.guide
        return max(1, round(min(5.0, guide.travel_mm / 4) * guide.steps_per_mm))

    @property
    def guide_pace(self) -> int:
        """Guide steps/s that need no ramp."""
        guide = self.profile.guide
        return max(1, min(4000, round(min(guide.start_stop_mm_per_s, 5.0) * guide.steps_per_mm)))

    def setup(self, fitted: Capability, **changes: int) -> Setup:
        """The limits of this test, from the profile; a token of its own, so that it voids what was before."""
        self.token += 1
        spindle = self.profile.spindle
        mine = Setup(
            coil_token=0xC4EC0000 + self.token,
            counts_per_turn=self.turn,
            steps_per_turn=self.steps,
            max_count=_TEST_TURNS_MAX * self.turn,
            max_pace=self.pace,
            accel=max(100, round(spindle.accel_rpm_per_s * self.steps / 60)),
            decel=self.decel,
            guide_min=-2 * self.guide_span,
            guide_max=2 * self.guide_span,
            slip_counts=max(2, self.turn // 20),
            reverse_counts=max(2, self.turn // 8),
            tension_low=0,
            tension_high=0xFFFF,
            fitted=int(fitted),
            rotation=0,
        )
        return replace(mine, **changes)

    def permission(self) -> Permission:
        """Of this moment. Raises Fault where the board has not been greeted."""
        present = self.picture.permission
        if present is None:
            raise Fault("the board is not greeted", "start the check again")
        return present

    # ------------------------------------------------------------ ways

    def wait(self, wants: Wants, until: Until, within_s: float, otherwise: str, advice: str = "") -> Waiting:
        """Until it is so. Raises Fault with what the board said instead."""
        seen = yield Need(wants, until, within_s)
        self.picture = seen.picture
        if not seen.met:
            refused = [one for one in seen.messages if isinstance(one, Refused)]
            why = f"; last refusal {refused[-1].why} with limit {refused[-1].limit}" if refused else ""
            raise Fault(f"{otherwise}{why}", advice)
        return seen

    def for_a_time(self, wants: Wants, seconds: float) -> Waiting:
        """Lets time pass."""
        seen = yield Need(wants, never, seconds)
        self.picture = seen.picture
        return seen

    def ask(self, question: Question, wants: Wants, until: Until | None = None) -> Waiting:
        """Of the person; raises LeftOut when passed over, or not seen in time."""
        seen = yield Need(wants, until or (never), HAND_S, question)
        self.picture = seen.picture
        if not seen.met:
            raise LeftOut(f"not done: {question.act.value}")
        return seen

    def ask_number(self, act: Act, text: str, unit: str, wants: Wants) -> Generator[Need, Seen, float]:
        """A figure that the person types, with either decimal sign."""
        seen = yield from self.ask(Question(act, text, number=True, unit=unit), wants)
        try:
            return float(seen.answer.replace(",", "."))
        except ValueError:
            raise LeftOut(f"{seen.answer!r} is no number of {unit}") from None

    def input_becomes(self, act: Act, bit: InputBit, on: bool, wants: Wants) -> Waiting:
        """The person does something that the board must see on that input."""

        def shows(picture: BoardPicture, came: list[BoardMessage]) -> bool:
            del came
            status = picture.status
            return status is not None and bool(status.inputs & bit) is on

        return (yield from self.ask(Question(act, f"Please {act.value}."), wants, shows))

    def drives_off(self) -> Waiting:
        """Whatever was before: held, standing, a trip cleared, drives off."""
        hold, otherwise = Wants(beat=True, hold=True), "it does not stand after a Hold"
        if not self.picture.stands:
            yield from self.wait(hold, stands, STAND_S, otherwise)
        yield from self.for_a_time(Wants(beat=True), 0.02)  # only a Hold that is wanted anew goes out
        before = self.picture.epoch  # each Hold raises it: consents are given anew behind it

        def obeyed(picture: BoardPicture, came: list[BoardMessage]) -> bool:
            return picture.epoch != before and stands(picture, came)

        yield from self.wait(hold, obeyed, STAND_S, otherwise)
        yield from self.for_a_time(Wants(beat=True), 0.1)  # another Hold may be on its way
        if self.picture.state == State.TRIPPED:
            yield from self.for_a_time(Wants(beat=True), 0.15)
            wants = Wants(beat=True, clear_trip=self.permission())
            yield from self.wait(
                wants, _in_state(State.DRIVES_OFF), COMMAND_S, "the trip does not clear",
                "close guard and hardware stop; see what the trip's table says clears it",
            )  # fmt: skip
        wants = Wants(beat=True, disarmed=True)
        return (
            yield from self.wait(wants, _in_state(State.DRIVES_OFF), COMMAND_S, "the drives do not go off")
        )

    def ready(self, setup: Setup) -> Waiting:
        """Placed at 0 and powered, nothing turning."""
        yield from self.drives_off()
        wants = Wants(beat=True, setup=setup)
        yield from self.wait(
            wants, setup_taken(setup), COMMAND_S, "the board does not take the profile's limits"
        )
        given = self.permission()
        wants = replace(wants, datum=Datum(0, 0, 0, 0, given), armed=given)
        return (yield from self.wait(wants, _in_state(State.READY), COMMAND_S, "the board does not arm"))

    def go(self, setup: Setup, stop: int | None) -> Waiting:
        """Turning at the test's pace towards `stop`, the board ready or held."""
        wants = self.turning(setup, stop)
        return (
            yield from self.wait(wants, _in_state(State.TURNING), COMMAND_S, "it does not start after Go")
        )

    def turning(self, setup: Setup, stop: int | None) -> Wants:
        """What is wanted while it turns; its consent is of this moment."""
        return Wants(
            beat=True, setup=setup, pace=self.pace, stop_point=stop, go=self.permission()
        )  # fmt: skip

    def guide_to(self, setup: Setup, guide: int) -> Waiting:
        """The guide there, the spindle at rest and powered."""
        place = GuidePlace(guide, self.guide_pace, self.permission())
        wants = Wants(beat=True, setup=setup, guide=place)

        def there(picture: BoardPicture, came: list[BoardMessage]) -> bool:
            status = picture.status
            return status is not None and status.guide == guide and stands(picture, came)

        return (yield from self.wait(wants, there, 30.0, f"the guide does not come to {guide} steps"))

    def readings(self, window: int, number: int) -> Generator[Need, Seen, list[Reading]]:
        """So many readings at rest."""
        wants = Wants(beat=True, sampling=Sampling(window, 1))
        taken: list[Reading] = []

        def enough(picture: BoardPicture, came: list[BoardMessage]) -> bool:
            del picture
            return sum(isinstance(one, Reading) for one in came) > number

        seen = yield from self.wait(wants, enough, 5.0 + number * (window + 200) / 1000, "no readings come")
        taken = [one for one in seen.messages if isinstance(one, Reading)]
        yield from self.for_a_time(Wants(beat=True), 0.1)
        return taken[1:]  # the first may have begun before the leads were at rest

    def status(self) -> Status:
        """The last one."""
        status = self.picture.status
        if status is None:
            raise Fault("no Status has come", "look at the line: baud rate, wiring, ground")
        return status


def never(picture: BoardPicture, came: list[BoardMessage]) -> bool:
    """Only time or an answer ends it."""
    del picture, came
    return False


def held(picture: BoardPicture, came: list[BoardMessage]) -> bool:
    """Stopped and standing, in whatever state it stopped."""
    return picture.state in (State.HELD, State.TRIPPED) and stands(picture, came)


def stands(picture: BoardPicture, came: list[BoardMessage]) -> bool:
    """Spindle and guide are at rest."""
    del came
    return picture.stands


def _in_state(state: State) -> Until:
    def so(picture: BoardPicture, came: list[BoardMessage]) -> bool:
        del came
        return picture.status is not None and picture.status.state == state

    return so


def setup_taken(setup: Setup) -> Until:
    """The board has this Setup."""
    crc = crc_hqx(setup.encode_body(), 0xFFFF)

    def so(picture: BoardPicture, came: list[BoardMessage]) -> bool:
        del came
        return picture.setup_crc == crc

    return so


def trip_name(status: Status) -> str:
    """Of the trip it shows."""
    try:
        return Trip(status.trip).name.lower()
    except ValueError:
        return f"trip {status.trip}"
