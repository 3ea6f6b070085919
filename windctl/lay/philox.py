"""Philox4x32-10: a counter-based random number generator of nothing but integer operations.

J. K. Salmon, M. A. Moraes, R. O. Dror, D. E. Shaw, "Parallel random numbers: as easy as 1, 2, 3", SC'11
(2011). The n-th number is a function of key and n alone, so a draw never depends on how many were made
before it.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

U64 = NDArray[np.uint64]

_MULTIPLIER = (np.uint64(0xD2511F53), np.uint64(0xCD9E8D57))
_WEYL = (0x9E3779B9, 0xBB67AE85)
_ROUNDS = 10
_LOW = np.uint64(0xFFFFFFFF)
_SHIFT = np.uint64(32)
_BLOCK = 1 << 14  # counters at a time: what is worked on stays in the processor's cache


def philox4x32(counter: tuple[U64, U64, U64, U64], key: tuple[int, int]) -> tuple[U64, U64, U64, U64]:
    """Four random words for each counter. Words are 32 bits wide, held in arrays of u64 of one shape."""
    c0, c1, c2, c3 = counter
    k0, k1 = key
    for _ in range(_ROUNDS):
        product0 = c0 * _MULTIPLIER[0]
        product1 = c2 * _MULTIPLIER[1]
        c0 = (product1 >> _SHIFT) ^ c1 ^ np.uint64(k0)
        c1 = product1 & _LOW
        c2 = (product0 >> _SHIFT) ^ c3 ^ np.uint64(k1)
        c3 = product0 & _LOW
        k0 = (k0 + _WEYL[0]) & 0xFFFFFFFF
        k1 = (k1 + _WEYL[1]) & 0xFFFFFFFF
    return c0, c1, c2, c3


def words(seed: int, stream: int, first: int, n: int) -> U64:
    """u64[4, n]: the four words of the numbers first .. first + n - 1 of one stream of a seed.

    The key is the seed's low 64 bits, the counter (number's low word, number's high word, stream, 0).
    """
    key = (seed & 0xFFFFFFFF, seed >> 32 & 0xFFFFFFFF)
    drawn = np.empty((4, n), dtype=np.uint64)
    for start in range(0, n, _BLOCK):
        numbers = np.arange(first + start, first + min(start + _BLOCK, n), dtype=np.uint64)
        high = numbers >> _SHIFT
        fixed = np.full_like(numbers, stream), np.zeros_like(numbers)
        part = drawn[:, start : start + _BLOCK]
        part[0], part[1], part[2], part[3] = philox4x32((numbers & _LOW, high, *fixed), key)
    return drawn
