"""What the readings give cause to warn of."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar


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
