"""Sine from integers alone, to 30 bits: no sine of the platform, whose last bits differ, takes part.

Pi comes from Machin's formula, each value of the quarter wave from the Taylor series, both in fixed
point with more digits than are kept.
"""

from __future__ import annotations

from functools import cache

import numpy as np
from numpy.typing import NDArray

I64 = NDArray[np.int64]

PHASE_BITS = 32  # a whole turn of phase is 2 ** 32
SINE_BITS = 30  # sine 1 is 2 ** 30

_TABLE_BITS = 12  # 4096 places round the circle; between them a straight line, off by 3e-7 at most
_GUARD_BITS = 80


def sine(phase: I64) -> I64:
    """i64[]: the sine of each phase (any integer, 2^32 a turn), 2^30 for 1."""
    table = _circle()
    between = PHASE_BITS - _TABLE_BITS
    place = (phase >> between) & ((1 << _TABLE_BITS) - 1)
    rest = phase & ((1 << between) - 1)
    value: I64 = table[place] + ((table[place + 1] - table[place]) * rest >> between)
    return value


@cache
def _circle() -> I64:
    """i64[4097]: one turn of the sine, its first value again at the end."""
    quarter = (1 << _TABLE_BITS) // 4
    rising = [_sine_of(place) for place in range(quarter + 1)]
    half = rising + rising[-2::-1]
    return np.array(half + [-value for value in half[1:]], dtype=np.int64)


def _sine_of(place: int) -> int:
    """sin(2 pi place / 4096), rounded to SINE_BITS, for a place in the first quarter."""
    x = 2 * pi_fixed(_GUARD_BITS) * place >> _TABLE_BITS
    square = x * x >> _GUARD_BITS
    total, term, n = 0, x, 1
    while term:
        total += term
        term = -(term * square >> _GUARD_BITS) // ((n + 1) * (n + 2))
        n += 2
        if abs(term) <= 1:
            break
    drop = _GUARD_BITS - SINE_BITS
    return (total + (1 << drop - 1)) >> drop


@cache
def pi_fixed(bits: int) -> int:
    """Pi times 2 ** bits, rounded down: Machin, pi = 16 arctan(1/5) - 4 arctan(1/239)."""
    extra = 16
    scale = 1 << bits + extra
    return 4 * (4 * _arctan_of_inverse(5, scale) - _arctan_of_inverse(239, scale)) >> extra


def _arctan_of_inverse(x: int, scale: int) -> int:
    """arctan(1/x) times `scale`, by its series."""
    power = scale // x
    total, n, sign = power, 1, 1
    while power:
        power //= x * x
        n += 2
        sign = -sign
        total += sign * (power // n)
    return total
