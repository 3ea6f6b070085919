"""The chi-square distribution; `scipy.special` takes a while to load, so only where it is asked for."""

from __future__ import annotations


def beyond(square: float, freedom: int) -> float:
    """The probability of more than `square` (>= 0) at `freedom` >= 1 degrees of freedom."""
    from scipy.special import chdtrc

    return float(chdtrc(freedom, square))


def quantile(below: float, freedom: int) -> float:
    """The value that a chi-square of `freedom` stays below with probability `below`, 0 < below < 1."""
    from scipy.special import chdtri

    return float(chdtri(freedom, 1.0 - below))
