"""What the host wants of the board: levels, not commands.

`record.decide` states them; `protocol.conversation` compares them with what the board reports and writes the
frames for the difference. A want that is already met costs nothing; repeating it is harmless.
Starting is the exception that must never repeat: `go` names the one motion epoch it was given for.
"""

from __future__ import annotations

from dataclasses import dataclass

from windctl.protocol.messages import Setup


@dataclass(frozen=True, slots=True)
class Permission:
    """An operator's consent to one movement: void as soon as the board's boot or epoch differ."""

    boot: int
    epoch: int


@dataclass(frozen=True, slots=True)
class Datum:
    """Where the machine stands, declared by the host: count, guide (steps) and place in the program."""

    count: int
    guide: int
    next: int
    into: int
    given_for: Permission
    nth: int = 0  # tells a declaration from an equal one before it


@dataclass(frozen=True, slots=True)
class GuidePlace:
    """Where the guide is to stand, in motor steps, brought there at `pace` steps/s with the spindle at rest.

    It moves something, so it takes a consent: once, for this permission.
    """

    guide: int
    pace: int
    given_for: Permission
    nth: int = 0  # tells a movement from an equal one before it


@dataclass(frozen=True, slots=True)
class Sampling:
    """Wanted readings of the contact: averaged over `window` ticks, one every `every` ticks."""

    window: int
    every: int


@dataclass(frozen=True, slots=True)
class Segments:
    """A program as the conversation streams it. `packed` is its wire form: (u16, i16) LE a segment."""

    id32: int
    packed: bytes

    @property
    def n(self) -> int:
        """Number of segments."""
        return len(self.packed) // 4


@dataclass(frozen=True, slots=True)
class Wants:
    """Everything the board should be. The default wants nothing but a greeting and stillness."""

    beat: bool = False
    hold: bool = False
    setup: Setup | None = None
    guide: GuidePlace | None = None  # before the datum: it is declared where it then stands
    datum: Datum | None = None
    program: Segments | None = None
    armed: Permission | None = None  # power the drives, once, for this epoch
    disarmed: bool = False
    pace: int = 0  # steps/s
    stop_point: int | None = None  # counts
    go: Permission | None = None
    sampling: Sampling | None = None
    clear_trip: Permission | None = None
