"""The count became another without the board's counting: somebody told it, or turned the spindle back by
hand."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar


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
class Unwound:
    """The spindle was turned back by hand with the drives off, from count `before` to `count`."""

    kind: ClassVar[str] = "unwound"
    at_ms: int
    before: int
    count: int


@dataclass(frozen=True, slots=True)
class CounterRead:
    """Nobody counts for windctl: somebody read `turn` off a counter, the spindle standing, and typed it.

    `doubted`: it can hardly be, so it changes nothing but that the same number once more is believed.
    `recounted`: the readings so far were taken at a wrong count, which is now called `turn`.
    """

    kind: ClassVar[str] = "counter_read"
    at_ms: int
    turn: int
    by: str
    doubted: bool = False
    recounted: bool = False
