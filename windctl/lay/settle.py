"""Loose wire slides: a heap is nowhere steeper than turns stack.

Where a scatter ends short of a flange it cannot stand as a cliff: turns slide off into the room before the
flange, until the slope is one at which turns lie on each other. Sliding moves wire and loses none. So what a
profile slides to is taken to be the nearest one, by least squares, that is nowhere too steep: over each
stretch that slides it is a straight slope of the same area, which reaches just as far as it takes for the
profile to go on without a step, and elsewhere it is unchanged.

A profile h(x) falls nowhere faster than `steepest` if h + steepest * x never falls; the nearest such one is a
monotone regression (pool adjacent violators). Rises are the same seen from the other end. The nearest that
keeps to both is found by projecting on each in turn (Dykstra 1983, from memory).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

F64 = NDArray[np.float64]

_ROUNDS = 500
_ENOUGH = 1e-3  # of the greatest step allowed


def settle(heights: F64, steepest: float) -> F64:
    """f64[n]: the heights after sliding; neighbours differ by at most `steepest`, the sum is the same."""
    settled: F64 = np.asarray(heights, dtype=np.float64)
    if float(np.abs(np.diff(settled)).max(initial=0.0)) <= steepest:
        return settled
    tilt = steepest * np.arange(len(heights))
    first = second = np.zeros(len(heights))
    for _ in range(_ROUNDS):
        # The profile may rest for a round while what is owed to either side still changes.
        owed, asked = first, settled + first
        falls = _rising(asked + tilt) - tilt
        first, asked = asked - falls, falls + second
        before, settled = settled, _rising((asked - tilt)[::-1])[::-1] + tilt
        second = asked - settled
        if max(np.abs(first - owed).max(), np.abs(settled - before).max()) <= steepest * _ENOUGH:
            break
    return settled


def _rising(values: F64) -> F64:
    """The nearest sequence that never falls, by least squares: pools of falling neighbours at their mean."""
    sums: list[float] = []
    sizes: list[int] = []
    for value in values.tolist():
        total, size = value, 1
        while sums and sums[-1] * size > total * sizes[-1]:
            total += sums.pop()
            size += sizes.pop()
        sums.append(total)
        sizes.append(size)
    pooled: F64 = np.repeat(np.array(sums) / np.array(sizes), sizes)
    return pooled
