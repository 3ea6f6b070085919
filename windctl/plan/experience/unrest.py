"""Whether a shop's coils differ from one another as much as is stated, or more.

The mean squared surprise over the one expected moves within a known band while they do. Beyond it, every
later coil of that lay is expected to differ by more, and teaches less. Quieter coils change nothing.
"""

from __future__ import annotations

from dataclasses import dataclass

_AS_STATED = 6.0  # coils that the stated figure is worth
_WINDOW = 24.0  # coils after which older ones fade
_LOUD_FROM = 1.7  # about two sd above 1 of the running mean of squares


@dataclass(frozen=True, slots=True)
class Unrest:
    """What the coils of one lay so far show."""

    loud: float = 1.0
    coils: float = 0.0

    @property
    def factor(self) -> float:
        """By how much the variance from coil to coil is to be multiplied, 1 or more."""
        return self.loud if self.loud > _LOUD_FROM else 1.0

    def heard(self, surprise: float, variance: float) -> Unrest:
        """After a coil that was `surprise` off where `variance` was stated."""
        weight = 1.0 / (_AS_STATED + self.coils + 1.0)
        loud = self.loud + weight * (surprise * surprise / variance - self.loud)
        return Unrest(loud, min(self.coils + 1.0, _WINDOW))
