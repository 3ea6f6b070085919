"""What the spindle did: it began to turn, came to rest, was stopped for safety."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar


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
