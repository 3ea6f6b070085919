"""The dry pass of the guide before the first turn."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar


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
