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
    """Somebody saw the guide, at `guide` motor steps, stand right inside a flange. `end`: "far", "start".

    `shift`, `shift_mm`: of the datum by then, from where the guide was put, by nudging. `apart_mm`: how much
    further apart the ends are, each as last seen right, than the program has them; 0: one datum suits both.
    """

    kind: ClassVar[str] = "guide_seen"
    at_ms: int
    guide: int
    end: str
    by: str
    shift: int = 0
    shift_mm: float = 0.0
    apart_mm: float = 0.0


@dataclass(frozen=True, slots=True)
class GuideNudged:
    """Somebody moves the guide at an end by so many motor steps, positive away from the start flange; the
    place where it then stands is the one that the program means."""

    kind: ClassVar[str] = "guide_nudged"
    at_ms: int
    steps: int
    mm: float
    end: str
    by: str
