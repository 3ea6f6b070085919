"""Consents of people, each void as soon as the board's boot or epoch differ."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar


@dataclass(frozen=True, slots=True)
class GoGiven:
    """Consent to one movement, void as soon as the board's boot or epoch differ.

    Given with the drives off it covers powering them and the one start that follows.
    `by`: "operator", "pedal", "virtual" (a simulated machine needs nobody's consent), "consent" (the start
    that follows from a consent given with the drives off).
    """

    kind: ClassVar[str] = "go_given"
    at_ms: int
    boot: int
    epoch: int
    by: str


@dataclass(frozen=True, slots=True)
class ClearGiven:
    """Somebody looked to the cause of a trip and consents to clearing it; nothing turns because of it."""

    kind: ClassVar[str] = "clear_given"
    at_ms: int
    boot: int
    epoch: int
    by: str
