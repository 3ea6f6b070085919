"""Travel: how far the guide has gone, turn-rounds unfolded, as a function of the spindle's counts.

A pattern makes one of these. Where along the gap the guide then is follows from folding it at the
turn-rounds.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from windctl.errors import PlanRefused
from windctl.lay.spec import LaySpec

I64 = NDArray[np.int64]

_MOST = 2**62  # nothing that is added or multiplied below may reach it


@dataclass(frozen=True, slots=True)
class Travel:
    """A line through (counts[i], sub_steps[i]): counts strictly rising, sub_steps never falling, both from 0.

    bends: the line bends at these points, so that a segment of the program must end there.
    """

    counts: I64
    sub_steps: I64
    bends: bool

    def __post_init__(self) -> None:
        """Raises PlanRefused for a travel whose products would not fit the integers."""
        longest, slowest = int(np.diff(self.sub_steps).max()), int(np.diff(self.counts).max())
        if longest * slowest >= _MOST:
            raise PlanRefused("this pitch needs more turns for a pass than a program can hold")

    def at(self, counts: I64) -> I64:
        """Travel at `counts`, sub-steps, rounded down."""
        piece = np.clip(np.searchsorted(self.counts, counts, side="right") - 1, 0, len(self.counts) - 2)
        rise = self.sub_steps[piece + 1] - self.sub_steps[piece]
        run = self.counts[piece + 1] - self.counts[piece]
        travel: I64 = self.sub_steps[piece] + rise * (counts - self.counts[piece]) // run
        return travel

    def reached(self, sub_steps: I64) -> I64:
        """First count at which the travel is at least `sub_steps` (all within the travel)."""
        piece = np.clip(np.searchsorted(self.sub_steps, sub_steps, side="left") - 1, 0, None)
        rise = self.sub_steps[piece + 1] - self.sub_steps[piece]
        run = self.counts[piece + 1] - self.counts[piece]
        counts: I64 = self.counts[piece] - (self.sub_steps[piece] - sub_steps) * run // rise
        return counts


def by_turn(spec: LaySpec, pitches: I64, *, bends: bool) -> Travel:
    """Travel of `spec.turns` turns, each with its pitch in sub-steps (all of at least 1)."""
    if int(pitches.max()) * spec.turns >= _MOST:
        raise PlanRefused(f"{spec.turns} turns of this pitch are more travel than a program can hold")
    travel = np.zeros(spec.turns + 1, dtype=np.int64)
    np.cumsum(pitches, out=travel[1:])
    counts = np.arange(spec.turns + 1, dtype=np.int64) * spec.counts_per_turn
    return Travel(counts, travel, bends)
