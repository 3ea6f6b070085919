"""What is known of one coil after some of its facts. Small, and stays so, however long the coil."""

from __future__ import annotations

from binascii import crc_hqx
from dataclasses import dataclass
from enum import Enum

from windctl.forecast.estimator import Estimate
from windctl.forecast.reading import Reading as CoilReading
from windctl.protocol.frames import CRC_START
from windctl.protocol.messages import Identity, InputBit, Refused, Status
from windctl.protocol.messages import State as BoardState
from windctl.protocol.wants import Permission
from windctl.record.events import (
    AlarmRaised,
    CheckAsked,
    CoilFinished,
    CoilStarted,
    ContactZeroed,
    CountCorrected,
    CounterRead,
    EndRequested,
    GoGiven,
    HandsAsked,
    Held,
    HoldRequested,
    LinkLost,
    PassAgreed,
    Tripped,
    WireBroke,
    ZeroRefused,
    ZeroWanted,
)
from windctl.record.guide_way import NOTHING_SHOWN, Shown


class Fit(Enum):
    """How the board that answered relates to this coil."""

    UNKNOWN = "unknown"  # nobody has answered yet
    FRESH = "fresh"  # nothing has ever been let go for this coil: the board is to be set up for it
    SAME = "same"  # the board has this coil in hand; its count and its place in the program are the coil's
    LOST = "lost"  # the board does not know where this coil stands: only the operator can tell the turn
    CORRECTED = "corrected"  # the operator has told the turn: the board is to be set up for it


@dataclass(frozen=True, slots=True)
class Before:
    """What a typed reading or turn changed, as it was before it; `ticks`: the board's, when it was typed."""

    ticks: int
    estimate: Estimate | None
    reading: CoilReading | None
    readings_used: int
    readings_gated: int
    settled_readings: int
    typed: bool
    check: CheckAsked | None
    checks: int
    checked_count: int | None
    stop_point: int | None
    top_ups: int
    alarm: AlarmRaised | None
    count: int
    hands: HandsAsked | None


@dataclass(frozen=True, slots=True)
class Zeroing:
    """A zeroing of the contact under way."""

    wanted: ZeroWanted
    since: int | None = None  # the board's ticks when the leads were said to be together
    now: float | None = None  # the last reading, ohm; inf: open
    ohms: tuple[float, ...] = ()  # the last settled readings since, as many as are needed at the most
    opens: int = 0  # open ones in a row since
    refused: ZeroRefused | None = None  # why the last attempt came to nothing


@dataclass(frozen=True)
class State:
    """One coil as its facts tell it. `None` is "not known" throughout.

    Without slots, so that `touched` can copy it whole: a new state follows every word of the board.
    """

    started: CoilStarted | None = None
    identity: Identity | None = None  # since the last greeting of this run
    status: Status | None = None  # of this conversation
    fit: Fit = Fit.UNKNOWN
    let_go: bool = False  # a consent was ever given: the spindle may have turned for this coil
    turning: bool = False
    boot: int = 0  # the board's boot number and epoch when it was last known to have this coil in hand
    epoch: int = 0
    count: int = 0  # the last count that is known for sure
    next: int = 0  # segments laid by then
    consent: GoGiven | None = None
    consented_since_greeting: bool = False
    hold: HoldRequested | None = None
    end: EndRequested | None = None
    clear: Permission | None = None
    stop_point: int | None = None  # counts
    stop_choices: int = 0
    top_ups: int = 0  # stop points chosen after the first stop at the target
    held: Held | None = None  # since the spindle last came to rest
    tripped: Tripped | None = None
    corrected: CountCorrected | None = None  # counts until the board has turned again
    board_count: int | None = None  # the board's own count when the turn was corrected under it
    guide_known: bool = False  # the board knows where the guide is, for this coil's program
    misplaced: bool = False  # the guide is to be brought to where the program has it at the count
    hands: HandsAsked | None = None  # until the next consent
    broke: WireBroke | None = None  # until the wire is joined
    broke_near: float | None = None  # turns: where the wire broke, if that is why the board tripped
    splices: int = 0
    check: CheckAsked | None = None  # until it is taken
    typed: bool = False  # a reading typed since the spindle came to rest is of use
    checks: int = 0  # readings for which the coil was stopped, or the wire lay bare anyway
    checked_count: int | None = None  # where the last check was taken, or passed over
    before_typed: Before | None = None  # while what was typed last can be taken back
    zero: Zeroing | None = None  # while the contact is to be zeroed
    zeroed: ContactZeroed | None = None  # the last one: what is taken off
    contact_off: bool = False  # the leads were together since the last go: the contact belongs on the wire
    counter: CounterRead | None = None  # the last one that was believed, since the last greeting
    doubted: int | None = None  # the turn that was typed last and can hardly be
    pass_wanted: bool = False  # the guide is to be seen at both ends before the first turn
    pass_agreed: PassAgreed | None = None
    shown: Shown = NOTHING_SHOWN  # how far that is, and what nudging has taught
    guide_lost: bool = False  # somebody has to put the guide to its start by hand, before that
    pace_percent: int = 100  # of the planned cruising pace, that somebody wants at the most
    refused: Refused | None = None  # the last refusal since the last consent
    link_lost: LinkLost | None = None
    estimate: Estimate | None = None
    reading: CoilReading | None = None  # the last one, used or not
    fresh_reading: bool = False  # the latest word of the board was a reading that taught something
    read_last: bool = False  # the latest word of the board was a reading, of use or not
    alarm: AlarmRaised | None = None  # the last one, until somebody consents to go on
    spool_told: bool = False  # that it will run out, or that another one was joined on
    readings_used: int = 0
    readings_gated: int = 0
    settled_readings: int = 0  # used ones since the spindle came to rest
    finished: CoilFinished | None = None

    @property
    def counts_per_turn(self) -> int:
        """Encoder counts in one turn of the spindle; 1 before the coil has started."""
        return self.started.setup.counts_per_turn if self.started else 1

    @property
    def by_eye(self) -> bool:
        """Nobody counts for windctl: turns are read off a counter and typed."""
        return self.started is not None and self.started.counter == "read"

    @property
    def turns(self) -> float:
        """Turns on the bobbin as last known."""
        return self.count / self.counts_per_turn

    @property
    def standing(self) -> bool:
        """The board says that nothing is driven and nothing turns any more."""
        status = self.status
        return (
            status is not None
            and status.state != BoardState.TURNING
            and bool(status.inputs & InputBit.STANDING)
        )

    @property
    def drives_off(self) -> bool:
        """Nothing is powered and nothing turns: hands may go in."""
        status = self.status
        if status is None or not self.standing:
            return False
        return status.state in (BoardState.DRIVES_OFF, BoardState.TRIPPED)

    @property
    def powered(self) -> bool:
        """The drives hold the spindle, which stands."""
        status = self.status
        return status is not None and status.state in (BoardState.READY, BoardState.HELD)

    @property
    def in_hand(self) -> bool:
        """The coil has turns, and how many is known."""
        return self.fit in (Fit.SAME, Fit.CORRECTED)

    @property
    def wire_ends_at(self) -> float:
        """Turns that have wire: those counted, less what was counted after a break."""
        if self.broke is not None:
            return min(self.broke.turn, self.turns)
        if self.broke_near is not None:
            return min(self.broke_near, self.turns)
        return self.turns

    @property
    def permission(self) -> Permission | None:
        """The board's present boot and epoch: what a consent given now would be good for."""
        if self.status is not None:
            return Permission(self.status.boot, self.status.epoch)
        if self.identity is not None:
            return Permission(self.identity.boot, self.identity.epoch)
        return None


def touched(state: State, fields: dict[str, object]) -> State:
    """The state with other `fields`: `dataclasses.replace` for what happens twenty times a second, of which
    half of the time to wind a simulated coil and to read its record again would otherwise be spent.

    Raises TypeError for a field that a state has not.
    """
    new = object.__new__(State)
    kept = new.__dict__
    kept.update(state.__dict__)
    n = len(kept)
    kept.update(fields)
    if len(kept) != n:
        raise TypeError(f"a state has no {', '.join(sorted(fields.keys() - state.__dict__.keys()))}")
    return new


def setup_crc(started: CoilStarted) -> int:
    """What the board reports as its setup once it has this coil's."""
    return crc_hqx(started.setup.encode_body(), CRC_START)
