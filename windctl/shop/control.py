"""Charts of individual values and of their moving ranges, and the rules by which a row of coils is out.

Centre and spread come from the mean and the mean moving range of two: sigma = MR/d2, limits at three sigma
(Shewhart; NIST/SEMATECH e-Handbook 6.3.2.2). The constants are those that tables print, so that a chart drawn
by hand agrees.

Two published sets of rules, both from memory: those of the Western Electric Company's Statistical Quality
Control Handbook (1956), which in a steady process speak once in 92 coils on average (Champ and Woodall,
Technometrics 29, 1987), and those of Nelson (Journal of Quality Technology 16, 1984), which ISO 8258, the
forerunner of ISO 7870-2, has too.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import copysign, inf
from statistics import fmean

_OF_THE_CENTRE = ("above", "below")
D2, D4 = 1.128, 3.267  # of moving ranges of two


@dataclass(frozen=True, slots=True)
class Chart:
    """`values` in order, about `centre` with limits; `ranges` between neighbours with theirs, one fewer.

    `baseline`: how many of the first values gave centre and spread.
    """

    values: tuple[float, ...]
    ranges: tuple[float, ...]
    baseline: int
    centre: float
    sigma: float
    low: float
    high: float
    mean_range: float
    high_range: float

    def place(self, value: float) -> float:
        """A value in sigmas from the centre."""
        off = value - self.centre
        if self.sigma > 0.0:
            return off / self.sigma
        return 0.0 if off == 0.0 else copysign(inf, off)


@dataclass(frozen=True, slots=True)
class Signal:
    """A rule was broken by the values from `first` to `last` (places from 0), and first seen to be at `seen`.

    `side`: 1 above the centre, -1 below, 0 neither.
    """

    rule: Rule
    first: int
    seen: int
    last: int
    side: int


@dataclass(frozen=True, slots=True)
class Rule:
    """`broken` looks at the last `window` places (in sigmas, fewer at the beginning), the newest last, and
    answers with the place within them where it began, and the side; or None."""

    set: str
    number: int
    words: str
    window: int
    broken: Callable[[Sequence[float]], tuple[int, int] | None]
    sides: tuple[str, str] = _OF_THE_CENTRE  # what its sides are called

    @property
    def name(self) -> str:
        """As it is cited."""
        return f"{self.set} rule {self.number}"

    def speaks_of(self, side: int, off: float) -> bool:
        """Whether a value `off` the centre, in a row that broke the rule on `side`, is one of those meant."""
        return side == 0 or self.sides != _OF_THE_CENTRE or side * off > 0.0


def individuals(values: Sequence[float], baseline: int | None = None) -> Chart:
    """The chart of `values`; its limits from the first `baseline` of them, from all if not given.

    Raises ValueError where there are fewer than two to go by.
    """
    n = len(values) if baseline is None else baseline
    if not 2 <= n <= len(values):
        raise ValueError(f"limits from {n} of {len(values)} coils: it takes at least 2")
    ranges = tuple(abs(after - before) for before, after in pairwise(values))
    centre, mean_range = fmean(values[:n]), fmean(ranges[: n - 1])
    sigma = mean_range / D2
    return Chart(
        tuple(values),
        ranges,
        n,
        centre,
        sigma,
        centre - 3.0 * sigma,
        centre + 3.0 * sigma,
        mean_range,
        D4 * mean_range,
    )


def signals(chart: Chart, rules: Sequence[Rule]) -> tuple[Signal, ...]:
    """Every breach of the rules in order of when it is seen; one that goes on is one."""
    places = [chart.place(value) for value in chart.values]
    found: list[Signal] = []
    for rule in rules:
        last: Signal | None = None
        for at in range(len(places)):
            start = max(at - rule.window + 1, 0)
            broken = rule.broken(places[start : at + 1])
            if broken is None:
                last = None
                continue
            began, side = start + broken[0], broken[1]
            if last is not None and last.side == side and began <= last.last + 1:
                found.pop()  # it goes on
                last = Signal(rule, last.first, last.seen, at, side)
            else:
                last = Signal(rule, began, at, at, side)
            found.append(last)
    return tuple(sorted(found, key=lambda one: (one.seen, one.rule.number)))


def wide_ranges(chart: Chart) -> tuple[int, ...]:
    """Places of values that lie further from the one before than the moving ranges' limit."""
    return tuple(at for at, step in enumerate(chart.ranges, 1) if step > chart.high_range)


def _beyond(limit: float, need: int) -> Callable[[Sequence[float]], tuple[int, int] | None]:
    """`need` of the window's places beyond `limit` sigmas on one side, the newest among them."""

    def broken(places: Sequence[float]) -> tuple[int, int] | None:
        for side in (1, -1):
            out = [at for at, z in enumerate(places) if side * z > limit]
            if len(out) >= need and out[-1] == len(places) - 1:
                return out[-need], side
        return None

    return broken


def _trend(length: int) -> Callable[[Sequence[float]], tuple[int, int] | None]:
    """`length` places each above the one before, or each below."""

    def broken(places: Sequence[float]) -> tuple[int, int] | None:
        if len(places) < length:
            return None
        steps = [after - before for before, after in pairwise(places)]
        for side in (1, -1):
            if all(side * step > 0.0 for step in steps):
                return 0, side
        return None

    return broken


def _alternating(length: int) -> Callable[[Sequence[float]], tuple[int, int] | None]:
    def broken(places: Sequence[float]) -> tuple[int, int] | None:
        steps = [after - before for before, after in pairwise(places)]
        if len(places) >= length and all(a * b < 0.0 for a, b in pairwise(steps)):
            return 0, 0
        return None

    return broken


def _hugging(length: int) -> Callable[[Sequence[float]], tuple[int, int] | None]:
    return lambda places: (0, 0) if len(places) >= length and all(abs(z) < 1.0 for z in places) else None


def _shunning(length: int) -> Callable[[Sequence[float]], tuple[int, int] | None]:
    return lambda places: (0, 0) if len(places) >= length and all(abs(z) > 1.0 for z in places) else None


_WE, _N = "Western Electric", "Nelson"

WESTERN_ELECTRIC = (
    Rule(_WE, 1, "beyond the three-sigma limit", 1, _beyond(3.0, 1)),
    Rule(_WE, 2, "two of three beyond two sigma", 3, _beyond(2.0, 2)),
    Rule(_WE, 3, "four of five beyond one sigma", 5, _beyond(1.0, 4)),
    Rule(_WE, 4, "eight in a row on one side of the centre", 8, _beyond(0.0, 8)),
)
NELSON = (
    Rule(_N, 1, "beyond the three-sigma limit", 1, _beyond(3.0, 1)),
    Rule(_N, 2, "nine in a row on one side of the centre", 9, _beyond(0.0, 9)),
    Rule(_N, 3, "six in a row, each further than the one before", 6, _trend(6), ("rising", "falling")),
    Rule(_N, 4, "fourteen in a row, up and down by turns", 14, _alternating(14)),
    Rule(_N, 5, "two of three beyond two sigma", 3, _beyond(2.0, 2)),
    Rule(_N, 6, "four of five beyond one sigma", 5, _beyond(1.0, 4)),
    Rule(_N, 7, "fifteen in a row within one sigma", 15, _hugging(15)),
    Rule(_N, 8, "eight in a row beyond one sigma on either side", 8, _shunning(8)),
)
RULES = {"western-electric": WESTERN_ELECTRIC, "nelson": NELSON}
