"""What a step of the check-up is: an inert description, and a course that yields what it needs next."""

from __future__ import annotations

from collections.abc import Callable, Generator
from dataclasses import dataclass, field
from enum import Enum
from typing import TYPE_CHECKING

from windctl.protocol.messages import BoardMessage, Capability
from windctl.protocol.picture import BoardPicture
from windctl.protocol.wants import Wants

if TYPE_CHECKING:
    from windctl.checkup.scene import Scene


NOTHING = Capability(0)


class Act(Enum):
    """What is asked of a person. Those in TYPED are answered by typing, the others are seen on the line."""

    CONSENT = "consent to powering the drives"
    OPEN_GUARD = "open the guard"
    CLOSE_GUARD = "close the guard"
    PRESS_STOP = "press the hardware stop"
    RELEASE_STOP = "release the hardware stop"
    PRESS_PEDAL = "press the pedal and keep it down"
    LET_PEDAL_GO = "let the pedal go"
    PRESS_LOW = "press the guide's low limit switch and keep it down"
    FREE_LOW = "let the low limit switch go"
    PRESS_HIGH = "press the guide's high limit switch and keep it down"
    FREE_HIGH = "let the high limit switch go"
    TURN = "turn the spindle by hand in the winding direction, ten turns, and stop at the same mark"
    LEADS_TOGETHER = "touch the contact's two leads together"
    REFERENCE = "connect a resistor of known value to the contact's leads"
    LEADS_FREE = "take the contact's leads off whatever they are on"
    GAUGE = "read the gauge at the guide"
    LOOK = "look which way the spindle turned"


TYPED = frozenset(
    {Act.CONSENT, Act.TURN, Act.LEADS_TOGETHER, Act.REFERENCE, Act.LEADS_FREE, Act.GAUGE, Act.LOOK}
)


@dataclass(frozen=True, slots=True)
class Question:
    """Put to a person. `number`: a figure in `unit` is wanted; else any line, even an empty one, is done."""

    act: Act
    text: str
    number: bool = False
    unit: str = ""


@dataclass(frozen=True, slots=True)
class Seen:
    """What a course gets back: the board as it is, what came since it last asked, and the person's answer."""

    picture: BoardPicture
    messages: tuple[BoardMessage, ...]
    now: float
    met: bool  # False: the time was over first, or the person passed over it
    answer: str = ""


@dataclass(frozen=True, slots=True)
class Need:
    """What a course waits for: `until` holds, within `within_s`, while the board is made `wants`.

    With a question that is typed, its answer ends the waiting instead.
    """

    wants: Wants
    until: Callable[[BoardPicture, list[BoardMessage]], bool]
    within_s: float
    question: Question | None = None


class Verdict(Enum):
    """How a step ended. The words are the table's."""

    GOOD = "good"
    FAULT = "fault"
    LEFT_OUT = "left out"
    NOT_FITTED = "not fitted"


@dataclass(frozen=True, slots=True)
class Result:
    """A step's outcome: what was measured beside its limit; calibrations by profile key, in its units."""

    key: str
    title: str
    verdict: Verdict
    measured: str = ""
    limit: str = ""
    advice: str = ""
    calibration: dict[str, float | int] = field(default_factory=dict)


Course = Generator[Need, Seen, Result]


@dataclass(frozen=True, slots=True)
class Step:
    """`needs`: fittings; `powered`: comes after the consent; `hand`: asks something of a person."""

    key: str
    title: str
    does: str
    course: Callable[[Scene], Course]
    needs: Capability = NOTHING
    powered: bool = False
    hand: bool = False


class LeftOut(Exception):
    """The person passed over it, or what was asked was not seen."""


class Fault(Exception):
    """The board or machine did not do what it must; carries what was seen and what to look at."""

    def __init__(self, seen: str, advice: str = "") -> None:
        self.seen = seen
        self.advice = advice
        super().__init__(seen)
