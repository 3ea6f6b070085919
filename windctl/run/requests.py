"""What somebody may ask of a run, whichever face it comes by. `by` is who: "operator", "windctl"."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Go:
    """Somebody gives consent to start."""

    by: str


@dataclass(frozen=True, slots=True)
class Hold:
    """Somebody asks the spindle to stand. `leave`: this run then ends and the coil stays open."""

    by: str
    reason: str
    leave: bool = False


@dataclass(frozen=True, slots=True)
class End:
    """Somebody ends the coil where it stands."""

    by: str
    reason: str


@dataclass(frozen=True, slots=True)
class Clear:
    """Somebody looked to the cause of a trip."""

    by: str


@dataclass(frozen=True, slots=True)
class Note:
    """Somebody writes something down."""

    by: str
    text: str


@dataclass(frozen=True, slots=True)
class DrivesOff:
    """Somebody wants to reach into the machine; `reason` says what for."""

    by: str
    reason: str


@dataclass(frozen=True, slots=True)
class Broke:
    """The wire broke after `turn` turns; None: where the trip tells, else at the present count."""

    by: str
    turn: float | None = None


@dataclass(frozen=True, slots=True)
class Splice:
    """The wire is joined; `turn` turns lie on the bobbin. None: those that have wire."""

    by: str
    turn: float | None = None


@dataclass(frozen=True, slots=True)
class NewWire:
    """Another spool, called `spool`, is joined on after `turn` turns; None: those that have wire."""

    by: str
    spool: str = ""
    turn: float | None = None


@dataclass(frozen=True, slots=True)
class CountIs:
    """The count is wrong: `turn` turns lie on the bobbin."""

    by: str
    turn: float


@dataclass(frozen=True, slots=True)
class Unwind:
    """Somebody turns the spindle back by hand; `turns` to take off, None: until they stop."""

    by: str
    turns: float | None = None


@dataclass(frozen=True, slots=True)
class Read:
    """The coil was measured by hand: `ohm` as the meter shows it; `celsius` None: what the board's shows."""

    by: str
    ohm: float
    celsius: float | None = None


@dataclass(frozen=True, slots=True)
class Skip:
    """A check, or a zeroing of the contact, is passed over."""

    by: str


@dataclass(frozen=True, slots=True)
class ZeroContact:
    """Before the first turn, leads and contact are to be read by themselves. `simulated_hand`: of a simulated
    machine, somebody can put its leads together."""

    by: str
    simulated_hand: bool = False


@dataclass(frozen=True, slots=True)
class Together:
    """The contact's leads are together, nothing between them."""

    by: str


@dataclass(frozen=True, slots=True)
class DryPass:
    """Before the first turn, the guide is to be seen at both of its turn-rounds."""

    by: str


@dataclass(frozen=True, slots=True)
class Seen:
    """The guide stands right where it is."""

    by: str


@dataclass(frozen=True, slots=True)
class Nudge:
    """The guide stands a little off: it is to stand `mm` further, positive towards the far flange."""

    by: str
    mm: float


@dataclass(frozen=True, slots=True)
class TakeBack:
    """The reading typed last was a mistake."""

    by: str


@dataclass(frozen=True, slots=True)
class Slower:
    """Somebody wants the spindle to turn a step slower."""

    by: str


@dataclass(frozen=True, slots=True)
class Faster:
    """Somebody wants the spindle to turn a step faster, at the most as the plan has it."""

    by: str


Request = (
    Go
    | Hold
    | End
    | Clear
    | Note
    | DrivesOff
    | Broke
    | Splice
    | NewWire
    | CountIs
    | Unwind
    | Read
    | Skip
    | ZeroContact
    | Together
    | DryPass
    | Seen
    | Nudge
    | TakeBack
    | Slower
    | Faster
)
