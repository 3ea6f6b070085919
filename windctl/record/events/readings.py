"""Readings of the coil's resistance, by the contact or by hand."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

from windctl.protocol.messages import Reading


@dataclass(frozen=True, slots=True)
class ReadingTaken:
    """The board measured the contact over one window."""

    kind: ClassVar[str] = "reading_taken"
    at_ms: int
    reading: Reading


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
class ReadingTakenBack:
    """The reading typed last was a mistake: it is as if neither it nor what followed had been."""

    kind: ClassVar[str] = "reading_taken_back"
    at_ms: int
    by: str
