"""The chi-square distribution for whole degrees of freedom, without a library: sums of known terms."""

from __future__ import annotations

from functools import lru_cache
from math import erfc, exp, lgamma, log, sqrt


def beyond(square: float, freedom: int) -> float:
    """The probability of more than `square` (>= 0) at `freedom` >= 1 degrees of freedom.

    By Q(x; v) = Q(x; v - 2) + (x/2)^(v/2 - 1) * exp(-x/2) / gamma(v/2), from erfc for odd v and exp for even
    (Abramowitz and Stegun 26.4.4 and 26.4.5, from memory).
    """
    if freedom < 1 or square < 0.0:
        raise ValueError(f"no chi-square of {square} at {freedom} degrees of freedom")
    if square == 0.0:
        return 1.0
    half = square / 2.0
    if freedom % 2:
        total, first = erfc(sqrt(half)), 3
    else:
        total, first = exp(-half), 4
    for v in range(first, freedom + 1, 2):
        total += exp((v / 2.0 - 1.0) * log(half) - half - lgamma(v / 2.0))
    return min(total, 1.0)


@lru_cache(maxsize=64)
def quantile(below: float, freedom: int) -> float:
    """The value that a chi-square of `freedom` stays below with probability `below`, 0 < below < 1."""
    if not 0.0 < below < 1.0:
        raise ValueError(f"a probability is between 0 and 1, not {below}")
    low, high = 0.0, float(freedom)
    while beyond(high, freedom) > 1.0 - below:
        high *= 2.0
    for _ in range(80):
        middle = (low + high) / 2.0
        if beyond(middle, freedom) > 1.0 - below:
            low = middle
        else:
            high = middle
    return (low + high) / 2.0
