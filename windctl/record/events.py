"""The facts of one coil, frozen and named in past tense.

Raw facts hold what the board said (integers, board ticks) and `at_ms`, the host's milliseconds since its run
began, on the port's clock. Whatever depended on a clock or on the estimator is a fact too, recorded before it
acted: a replay never has to estimate or measure time again to know what was done.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

from windctl.plan.experience.basis import Basis
from windctl.plan.pace import PaceSpec
from windctl.plan.prior import Prior
from windctl.protocol.messages import Identity, Reading, Refused, Setup, Status


@dataclass(frozen=True, slots=True)
class Target:
    """What ends the coil. `kind` is "turns" or "dcr_20c_ohm"; `value` turns or ohm at 20 degrees C.

    `tolerance_pct` belongs to the quantity of the target. The turns are never outside `min_turns..max_turns`.
    """

    kind: str
    value: float
    tolerance_pct: float
    min_turns: int
    max_turns: int


@dataclass(frozen=True, slots=True)
class CoilStarted:
    """Everything that the coil stands on, so that no later version of anything is needed to go on with it."""

    kind: ClassVar[str] = "coil_started"
    coil_id: str
    number: str
    wall_time: str
    operator: str
    version: str
    recipe_name: str
    recipe_text: str
    recipe_digest: str
    profile_json: str
    machine: str  # the profile's name; of a simulated machine with its plant seed
    readings_mode: str  # "live", "checks", "none"
    program_digest: str
    program_id: int
    program_packed: str  # base64 of zlib of the segments in wire form
    total_counts: int
    setup: Setup
    pace: PaceSpec
    prior: Prior
    target: Target
    planned_turns: float
    spool: str
    batch: str
    of: int  # 0: not part of a counted batch
    basis: Basis | None = None  # what the coil is compared with when it teaches; None: an older version's
    spool_left_m: float | None = None  # wire on the spool as the coil was begun, as far as was known
    spool_left_sd_m: float | None = None
    guide_pace: int = 200  # motor steps/s at which the guide is brought back to a place, the spindle at rest


@dataclass(frozen=True, slots=True)
class Resumed:
    """Another run took the coil up after an interruption."""

    kind: ClassVar[str] = "resumed"
    at_ms: int
    wall_time: str
    operator: str
    version: str


@dataclass(frozen=True, slots=True)
class BoardGreeted:
    """The board answered a greeting: what it is and where it stands."""

    kind: ClassVar[str] = "board_greeted"
    at_ms: int
    identity: Identity


@dataclass(frozen=True, slots=True)
class StatusHeard:
    """The board said where it stands."""

    kind: ClassVar[str] = "status_heard"
    at_ms: int
    status: Status


@dataclass(frozen=True, slots=True)
class ReadingTaken:
    """The board measured the contact over one window."""

    kind: ClassVar[str] = "reading_taken"
    at_ms: int
    reading: Reading


@dataclass(frozen=True, slots=True)
class CommandRefused:
    """The board declined a command; nothing changed."""

    kind: ClassVar[str] = "command_refused"
    at_ms: int
    refused: Refused


@dataclass(frozen=True, slots=True)
class GoGiven:
    """Consent to one movement, void as soon as the board's boot or epoch differ.

    Given with the drives off it covers powering them and the one start that follows.
    `by`: "operator", "pedal", "virtual" (a simulated machine needs nobody's consent), "consent" (the start
    that follows from a consent given with the drives off).
    """

    kind: ClassVar[str] = "go_given"
    at_ms: int
    boot: int
    epoch: int
    by: str


@dataclass(frozen=True, slots=True)
class HoldRequested:
    """Somebody or something on the host's side asked the spindle to stand."""

    kind: ClassVar[str] = "hold_requested"
    at_ms: int
    by: str
    reason: str


@dataclass(frozen=True, slots=True)
class EndRequested:
    """The operator wants this coil ended where it stands."""

    kind: ClassVar[str] = "end_requested"
    at_ms: int
    by: str
    reason: str


@dataclass(frozen=True, slots=True)
class ClearGiven:
    """Somebody looked to the cause of a trip and consents to clearing it; nothing turns because of it."""

    kind: ClassVar[str] = "clear_given"
    at_ms: int
    boot: int
    epoch: int
    by: str


@dataclass(frozen=True, slots=True)
class StopPointChosen:
    """Where the spindle is to stop, in counts, and what was forecast for that place when it was chosen."""

    kind: ClassVar[str] = "stop_point_chosen"
    at_ms: int
    count: int
    reason: str
    finish_ohm: float
    finish_sd: float


@dataclass(frozen=True, slots=True)
class AlarmRaised:
    """The readings left what the coil's beginning allows. `alarm`: open, short, jump, wire, unsteady, doubt.

    `odds`: of the named reason against everything being right, where it can be said; else 0.
    """

    kind: ClassVar[str] = "alarm_raised"
    at_ms: int
    turn: float
    alarm: str
    text: str
    odds: float


@dataclass(frozen=True, slots=True)
class WentOn:
    """The spindle began to turn."""

    kind: ClassVar[str] = "went_on"
    at_ms: int
    count: int


@dataclass(frozen=True, slots=True)
class Held:
    """The spindle came to rest. `cause` is the board's word for why."""

    kind: ClassVar[str] = "held"
    at_ms: int
    ticks: int
    count: int
    cause: int


@dataclass(frozen=True, slots=True)
class Tripped:
    """The board stopped itself for safety."""

    kind: ClassVar[str] = "tripped"
    at_ms: int
    count: int
    trip: int


@dataclass(frozen=True, slots=True)
class LinkLost:
    """The line to the board went away."""

    kind: ClassVar[str] = "link_lost"
    at_ms: int
    reason: str


@dataclass(frozen=True, slots=True)
class CountCorrected:
    """The operator declared at which turn the coil stands.

    `miscounted`: the wire counted so far lies on the bobbin and only its number was wrong. Otherwise what was
    counted stays right, and the coil stands elsewhere now: nobody counted, or turns were counted without
    wire.
    """

    kind: ClassVar[str] = "count_corrected"
    at_ms: int
    turn: float
    by: str
    reason: str
    miscounted: bool = False


@dataclass(frozen=True, slots=True)
class HandsAsked:
    """Somebody has to reach into the machine: the drives go off, until the next consent."""

    kind: ClassVar[str] = "hands_asked"
    at_ms: int
    by: str
    reason: str


@dataclass(frozen=True, slots=True)
class WireBroke:
    """The wire broke when `turn` turns lay on the bobbin; what was counted beyond is without wire."""

    kind: ClassVar[str] = "wire_broke"
    at_ms: int
    turn: float
    by: str


@dataclass(frozen=True, slots=True)
class Spliced:
    """The wire was joined at `turn`; the same spool goes on."""

    kind: ClassVar[str] = "spliced"
    at_ms: int
    turn: float
    by: str


@dataclass(frozen=True, slots=True)
class WireChanged:
    """Another spool of the recipe's wire was joined on at `turn`. `spool`: its name, where it has one."""

    kind: ClassVar[str] = "wire_changed"
    at_ms: int
    turn: float
    spool: str
    by: str


@dataclass(frozen=True, slots=True)
class CheckAsked:
    """The coil stands for its resistance to be read: the wire is bared at the guide, and touched.

    The standard deviations are of the resistance at the target, ohm at 20 degrees C, without a reading here
    and with one.
    """

    kind: ClassVar[str] = "check_asked"
    at_ms: int
    turn: float
    without_ohm: float
    with_ohm: float


@dataclass(frozen=True, slots=True)
class ReadingTyped:
    """Somebody measured the coil by hand after `turn` turns: `ohm` as the meter showed it, at `celsius`."""

    kind: ClassVar[str] = "reading_typed"
    at_ms: int
    turn: float
    ohm: float
    celsius: float
    by: str


@dataclass(frozen=True, slots=True)
class CheckTaken:
    """The check is over. `read`: a reading was taken, by the contact or by hand; else it was passed over."""

    kind: ClassVar[str] = "check_taken"
    at_ms: int
    turn: float
    read: bool
    by: str


@dataclass(frozen=True, slots=True)
class ReadingTakenBack:
    """The reading typed last was a mistake: it is as if neither it nor what followed had been."""

    kind: ClassVar[str] = "reading_taken_back"
    at_ms: int
    by: str


@dataclass(frozen=True, slots=True)
class PaceAsked:
    """Somebody wants the spindle to turn at `percent` of the planned pace at the most, from now on."""

    kind: ClassVar[str] = "pace_asked"
    at_ms: int
    percent: int
    by: str


@dataclass(frozen=True, slots=True)
class PassWanted:
    """Before the first turn the guide is to be seen at both of its turn-rounds, nothing turning."""

    kind: ClassVar[str] = "pass_wanted"
    at_ms: int
    by: str


@dataclass(frozen=True, slots=True)
class PassAgreed:
    """Consent to powering the drives and moving the guide there and back, void with the board's epoch."""

    kind: ClassVar[str] = "pass_agreed"
    at_ms: int
    boot: int
    epoch: int
    by: str


@dataclass(frozen=True, slots=True)
class GuideSeen:
    """Somebody saw the guide, at `guide` motor steps, stand right inside a flange. `end`: "far", "start"."""

    kind: ClassVar[str] = "guide_seen"
    at_ms: int
    guide: int
    end: str
    by: str


@dataclass(frozen=True, slots=True)
class Unwound:
    """The spindle was turned back by hand with the drives off, from count `before` to `count`."""

    kind: ClassVar[str] = "unwound"
    at_ms: int
    before: int
    count: int


@dataclass(frozen=True, slots=True)
class NoteMade:
    """Somebody wrote something down."""

    kind: ClassVar[str] = "note_made"
    at_ms: int
    text: str
    by: str


@dataclass(frozen=True, slots=True)
class CoilFinished:
    """The end of the coil: always an outcome and a reason.

    `outcome`: "finished", "stopped" (by the operator), "tripped". `dcr_20c_ohm`, `dcr_u95_ohm` are 0 where
    nothing is known; u95 is the half-width of the 95 % interval. `verdict`: "within", "outside" or
    "not judged".
    """

    kind: ClassVar[str] = "coil_finished"
    at_ms: int
    outcome: str
    reason: str
    count: int
    turns: float
    dcr_20c_ohm: float
    dcr_u95_ohm: float
    verdict: str


Event = (
    CoilStarted
    | Resumed
    | BoardGreeted
    | StatusHeard
    | ReadingTaken
    | CommandRefused
    | GoGiven
    | HoldRequested
    | EndRequested
    | ClearGiven
    | StopPointChosen
    | AlarmRaised
    | WentOn
    | Held
    | Tripped
    | LinkLost
    | CountCorrected
    | HandsAsked
    | WireBroke
    | Spliced
    | WireChanged
    | CheckAsked
    | ReadingTyped
    | CheckTaken
    | ReadingTakenBack
    | PaceAsked
    | PassWanted
    | PassAgreed
    | GuideSeen
    | Unwound
    | NoteMade
    | CoilFinished
)

KINDS: dict[str, type[Event]] = {
    cls.kind: cls
    for cls in (
        CoilStarted,
        Resumed,
        BoardGreeted,
        StatusHeard,
        ReadingTaken,
        CommandRefused,
        GoGiven,
        HoldRequested,
        EndRequested,
        ClearGiven,
        StopPointChosen,
        AlarmRaised,
        WentOn,
        Held,
        Tripped,
        LinkLost,
        CountCorrected,
        HandsAsked,
        WireBroke,
        Spliced,
        WireChanged,
        CheckAsked,
        ReadingTyped,
        CheckTaken,
        ReadingTakenBack,
        PaceAsked,
        PassWanted,
        PassAgreed,
        GuideSeen,
        Unwound,
        NoteMade,
        CoilFinished,
    )
}

DENSE = (StatusHeard, ReadingTaken)  # many a second: stored in chunks

# Facts that must be durable before what they permit is done.
BEFORE_ACTING = (CoilStarted, Resumed, GoGiven, PassAgreed, ClearGiven, CountCorrected)
