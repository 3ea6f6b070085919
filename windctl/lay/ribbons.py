"""Ribbons: a lay that keeps coming back to its own path.

A double traverse is the way to the far flange and back. Where it takes nearly p/q turns with a small q, the
wire after q of them lies where it lay before, and goes on piling up there in place of spreading: a ribbon
(textile winding: Koranne, Fundamentals of Yarn Winding, 2013). The paths of q double traverses stand 1/q turn
apart, and each q of them shift the pattern by the rest, s turns: so it has moved on by one of its own
spacings after 1/s double traverses. Here a coil counts as ribboned where that happens less than twice while
it is wound. A lay whose passes differ among themselves shifts by chance as well, which breaks the pattern
just as well: so the shifts are measured on the program, not reckoned from the pitch.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from windctl.lay.program import Program

MOST_Q = 8
_SPACINGS = 2.0  # that a pattern must move on over a coil. Our judgement
_LEAST_SHIFT, _MOST_SHIFT = 0.005, 0.03  # turns: what counts resolve; what is no repetition in any coil
_LEAST_REPEATS = 4
_HEADROOM = 0.012  # turns, for a pitch that is offered: a program rounds to whole counts and steps


@dataclass(frozen=True, slots=True)
class Ribbon:
    """The path repeats every `q` double traverses of `turns` turns each, but for `shift` turns (rms)."""

    q: int
    turns: float
    shift: float
    repeats: int  # over the coil


def ribbon(program: Program) -> Ribbon | None:
    """The ribbon with the smallest q, or None for a lay that spreads."""
    starts = outward_starts(program) / program.counts_per_turn
    doubles = len(starts) - 1
    if doubles < _LEAST_REPEATS:
        return None
    near = near_shift(doubles)
    mean = float(starts[-1] - starts[0]) / doubles
    for q in range(1, min(MOST_Q, doubles // _LEAST_REPEATS) + 1):
        ways = starts[q:] - starts[:-q]
        shift = math.sqrt(float(np.mean((ways - np.round(ways)) ** 2)))
        if shift < near:
            return Ribbon(q, mean, shift, doubles // q)
    return None


def near_shift(doubles: float) -> float:
    """Below this shift, turns, a pattern of a coil of so many double traverses stands as a ribbon."""
    return min(max(_SPACINGS / doubles, _LEAST_SHIFT), _MOST_SHIFT)


def is_clear(turns: float, doubles: float) -> bool:
    """Whether a regular lay of `turns` turns per double traverse is well away from every ribbon."""
    near = near_shift(doubles) + _HEADROOM
    return all(abs(q * turns - round(q * turns)) > near for q in range(1, MOST_Q + 1))


def nearest_clear(
    value: float, decimals: int, turns_for: Callable[[float], float], doubles: float
) -> float | None:
    """The number of so many decimals nearest to `value`, within a tenth of it, that makes a clear lay.

    turns_for: turns per double traverse that a number makes. None where there is none.
    """
    unit = 10.0**-decimals
    middle = round(value / unit)
    for off in range(1, max(2, middle // 10)):
        for units in (middle - off, middle + off):
            candidate = round(units * unit, decimals)
            if candidate > 0 and is_clear(turns_for(candidate), doubles):
                return candidate
    return None


def outward_starts(program: Program) -> NDArray[np.int64]:
    """i64[]: the counts at which the guide leaves its turn-rounds next to the start flange, the coil's start
    included."""
    moving = np.flatnonzero(program.guide)
    outward = program.guide[moving] > 0
    leaves = outward & ~np.concatenate([[False], outward[:-1]])
    starts: NDArray[np.int64] = program.count_marks[moving[leaves]]
    return starts
