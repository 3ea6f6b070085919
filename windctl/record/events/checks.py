"""Checks: the coil stands for its resistance to be read."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar


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
class CheckTaken:
    """The check is over. `read`: a reading was taken, by the contact or by hand; else it was passed over."""

    kind: ClassVar[str] = "check_taken"
    at_ms: int
    turn: float
    read: bool
    by: str
