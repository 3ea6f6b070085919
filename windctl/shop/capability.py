"""Whether coils come out within their tolerance, as a ratio, and how sure a few coils make that.

Cp compares the tolerance with six standard deviations, Cpk the nearer limit's distance from the mean with
three. Both with s, the standard deviation of all coils about their mean, so that drift counts. Cp's interval
is exact for a normal spread (s^2 goes as chi-square); Cpk's is Bissell's approximation (How reliable is your
capability index?, Applied Statistics 39, 1990, from memory; also in the NIST/SEMATECH e-Handbook, 6.1.6).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import sqrt
from statistics import fmean, stdev

from windctl.forecast.finish import Z95
from windctl.shop.chi_square import quantile


@dataclass(frozen=True, slots=True)
class Index:
    """A capability index with its 95 % interval."""

    value: float
    low: float
    high: float


@dataclass(frozen=True, slots=True)
class Capability:
    """Of `n` coils against limits in the quantity's unit. `cp` is None with a limit on one side only."""

    n: int
    mean: float
    sd: float
    low: float | None
    high: float | None
    cp: Index | None
    cpk: Index


def capability(values: Sequence[float], low: float | None, high: float | None) -> Capability:
    """Of values in any unit. Raises ValueError for fewer than two values, for values that are all alike, and
    without a limit or with limits that cross."""
    n = len(values)
    if n < 2:
        raise ValueError("the spread of coils is seen in two or more")
    if low is None and high is None:
        raise ValueError("there is no limit to compare with")
    if low is not None and high is not None and low >= high:
        raise ValueError(f"the limits cross: {low:g} to {high:g}")
    mean, sd = fmean(values), stdev(values)
    if not sd > 0.0:
        raise ValueError("the coils are all alike")
    room = min(
        (mean - low) / (3.0 * sd) if low is not None else float("inf"),
        (high - mean) / (3.0 * sd) if high is not None else float("inf"),
    )
    half = Z95 * sqrt(1.0 / (9.0 * n) + room * room / (2.0 * (n - 1)))
    cp = None
    if low is not None and high is not None:
        wide = (high - low) / (6.0 * sd)
        freedom = n - 1
        cp = Index(
            wide,
            wide * sqrt(quantile(0.025, freedom) / freedom),
            wide * sqrt(quantile(0.975, freedom) / freedom),
        )
    return Capability(n, mean, sd, low, high, cp, Index(room, room - half, room + half))
