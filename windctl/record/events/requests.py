"""What somebody wants that needs no consent: to hold, to end, to reach in, another pace."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar


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
class HandsAsked:
    """Somebody has to reach into the machine: the drives go off, until the next consent."""

    kind: ClassVar[str] = "hands_asked"
    at_ms: int
    by: str
    reason: str


@dataclass(frozen=True, slots=True)
class PaceAsked:
    """Somebody wants the spindle to turn at `percent` of the planned pace at the most, from now on."""

    kind: ClassVar[str] = "pace_asked"
    at_ms: int
    percent: int
    by: str
