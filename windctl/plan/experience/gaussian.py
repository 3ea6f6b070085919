"""A Gaussian belief about named unknowns. Small (a dozen or two), so plain floats and no library: the same
lessons give the same bits.

Every unknown is a relative deviation, so all are of the order of a hundredth.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass
from math import sqrt

Name = tuple[str, str]  # what it is, and of which thing: ("level", "s12")


@dataclass(frozen=True, slots=True)
class Gaussian:
    """`names`, their `mean`, and `cov`, symmetric to the bit."""

    names: tuple[Name, ...] = ()
    mean: tuple[float, ...] = ()
    cov: tuple[tuple[float, ...], ...] = ()

    def knows(self, name: Name) -> bool:
        """Whether this unknown is part of the belief."""
        return name in self.names

    def value(self, name: Name) -> float:
        """The mean of one unknown; 0 for one that nothing is known of."""
        return self.mean[self.names.index(name)] if name in self.names else 0.0

    def along(self, row: Mapping[Name, float]) -> float:
        """The mean of a weighted sum."""
        return sum(weight * self.value(name) for name, weight in row.items())

    def covariance(self, first: Mapping[Name, float], second: Mapping[Name, float]) -> float:
        """The covariance of two weighted sums of unknowns."""
        spread = self._spread(second)
        return sum(weight * spread[self.names.index(name)] for name, weight in first.items())

    def sd(self, name: Name) -> float:
        """The standard deviation of one unknown."""
        at = self.names.index(name)
        return sqrt(self.cov[at][at])

    def having(self, name: Name, sd: float, mean: float = 0.0) -> Gaussian:
        """With one more unknown, independent of the others; as it is if it is there already."""
        if name in self.names:
            return self
        rows = tuple((*row, 0.0) for row in self.cov)
        last = (*(0.0 for _ in self.names), sd * sd)
        return Gaussian((*self.names, name), (*self.mean, mean), (*rows, last))

    def without(self, gone: Collection[Name]) -> Gaussian:
        """The same belief about the other unknowns."""
        stay = [at for at, name in enumerate(self.names) if name not in gone]
        return Gaussian(
            tuple(self.names[at] for at in stay),
            tuple(self.mean[at] for at in stay),
            tuple(tuple(self.cov[i][j] for j in stay) for i in stay),
        )

    def drifted(self, name: Name, by: Name, factor: float, variance: float) -> Gaussian:
        """After `name` has gained `factor` times `by` and a step of this variance."""
        i, j = self.names.index(name), self.names.index(by)
        mean = list(self.mean)
        mean[i] += factor * mean[j]
        rows = [list(row) for row in self.cov]
        for k, value in enumerate(self.cov[j]):
            rows[i][k] += factor * value
        for row in rows:
            row[i] += factor * row[j]
        rows[i][i] += variance
        for k in range(len(rows)):  # the two halves were added up in another order
            rows[k][i] = rows[i][k]
        return Gaussian(self.names, tuple(mean), tuple(map(tuple, rows)))

    def told(self, row: Mapping[Name, float], off: float, variance: float) -> Gaussian:
        """After a measurement of the weighted sum `row` came out `off` above what was expected; `variance`
        is that of its own error.

        Joseph's form, written so that both halves of the covariance come out with the same bits.
        """
        v = self._spread(row)
        total = sum(weight * v[self.names.index(name)] for name, weight in row.items()) + variance
        k = [x / total for x in v]
        root = sqrt(total)
        u = [x * root for x in k]
        mean = tuple(m + x * off for m, x in zip(self.mean, k, strict=True))
        cov = tuple(
            tuple(p - (ki * vj + vi * kj) + ui * uj for p, vj, kj, uj in zip(line, v, k, u, strict=True))
            for line, vi, ki, ui in zip(self.cov, v, k, u, strict=True)
        )
        return Gaussian(self.names, mean, cov)

    def _spread(self, row: Mapping[Name, float]) -> list[float]:
        """The covariance of every unknown with a weighted sum."""
        spread = [0.0] * len(self.names)
        for name, weight in row.items():
            line = self.cov[self.names.index(name)]
            spread = [s + weight * p for s, p in zip(spread, line, strict=True)]
        return spread
