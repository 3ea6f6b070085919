"""Draws that a lay makes, from integers only: uniform, and approximately normal as a sum of uniforms.

Every use has a stream of its own, so that one part of a lay never moves another's draws.
"""

from __future__ import annotations

import math
from enum import IntEnum

import numpy as np
from numpy.typing import NDArray

from windctl.lay.philox import words

I64 = NDArray[np.int64]

ONE = 1 << 16  # one standard deviation of a normal draw; the end of a uniform one's range

_MOST16 = 0xFFFF
_SUMMANDS = 8
# A uniform integer 0 .. 2^16 - 1 has variance (2^32 - 1)/12, twice the sum of eight of them 8/3 (2^32 - 1).
# This is 2^32 over its standard deviation: after the product, 16 bits down make ONE of it.
_NORM = math.isqrt(3 * 2**64 // (8 * (2**32 - 1)))


class Stream(IntEnum):
    """What a draw is for. Numbers are never reused: they are part of what makes a program."""

    WANDER = 1
    REVERSAL = 2
    STAGGER = 3
    RIPPLE = 4


def normals(seed: int, stream: Stream, n: int) -> I64:
    """i64[n]: mean 0, standard deviation ONE, by the sum of eight uniforms: never beyond 4.9 of them."""
    total = np.zeros(n, dtype=np.int64)
    for word in words(seed, stream, 0, n).view(np.int64):
        total += word & _MOST16
        total += word >> 16
    centred = 2 * total - _SUMMANDS * _MOST16
    drawn: I64 = (centred * _NORM + (1 << 15)) >> 16
    return drawn


def uniforms(seed: int, stream: Stream, n: int, word: int = 0) -> I64:
    """i64[n]: uniform in 0 .. ONE - 1. Each draw has four independent words, `word` says which."""
    drawn: I64 = words(seed, stream, 0, n)[word].view(np.int64) >> 16
    return drawn
