"""A figure that is normal under each of several hypotheses."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import erf, exp, sqrt

_HALVINGS = 80


@dataclass(frozen=True, slots=True)
class Part:
    """One hypothesis: how likely it is, and what the figure is under it."""

    weight: float
    mean: float
    sd: float


@dataclass(frozen=True, slots=True)
class Interval:
    """Where a figure lies: its median, and the ends of its 95 % interval."""

    value: float
    low: float
    high: float


def interval_of_log(parts: Sequence[Part]) -> Interval:
    """The interval of a figure whose logarithm has these parts. Weights add up to 1."""
    low, middle, high = (quantile(parts, p) for p in (0.025, 0.5, 0.975))
    return Interval(exp(middle), exp(low), exp(high))


def quantile(parts: Sequence[Part], p: float) -> float:
    """The value below which the mixture lies with probability `p`, by halving."""
    low = min(part.mean - 9.0 * part.sd for part in parts)
    high = max(part.mean + 9.0 * part.sd for part in parts)
    for _ in range(_HALVINGS):
        middle = (low + high) / 2.0
        below = sum(part.weight * _normal_below(middle, part) for part in parts)
        low, high = (middle, high) if below < p else (low, middle)
    return (low + high) / 2.0


def _normal_below(x: float, part: Part) -> float:
    return 0.5 * (1.0 + erf((x - part.mean) / (part.sd * sqrt(2.0))))
