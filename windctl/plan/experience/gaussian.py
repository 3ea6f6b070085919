"""A Gaussian belief about named unknowns. Small (a dozen or two), so plain floats and no library: the same
lessons give the same bits.

Every unknown is a relative deviation, so all are of the order of a hundredth.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache
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
        return self.weighed(first, self.spread(second))

    def spread(self, row: Mapping[Name, float]) -> list[float]:
        """The covariance of every unknown with a weighted sum."""
        places = _places(self.names)
        spread = [0.0] * len(self.names)
        for name, weight in row.items():
            line = self.cov[places[name]]
            spread = [s + weight * p for s, p in zip(spread, line, strict=True)]
        return spread

    def weighed(self, row: Mapping[Name, float], values: Sequence[float]) -> float:
        """A weighted sum of values that belong to the unknowns in turn."""
        places = _places(self.names)
        return sum([weight * values[places[name]] for name, weight in row.items()])

    def sd(self, name: Name) -> float:
        """The standard deviation of one unknown."""
        at = self.names.index(name)
        return sqrt(self.cov[at][at])

    def having(self, name: Name, sd: float, mean: float = 0.0) -> Gaussian:
        """With one more unknown, independent of the others; as it is if it is there already."""
        return self if name in self.names else self._longer([(name, sd, mean)])

    def having_all(self, unknowns: Iterable[tuple[Name, float]]) -> Gaussian:
        """The same with several, each with its standard deviation."""
        sds = dict(unknowns)
        return self._longer([(name, sd, 0.0) for name, sd in sds.items() if name not in self.names])

    def _longer(self, new: Sequence[tuple[Name, float, float]]) -> Gaussian:
        if not new:
            return self
        n, more = len(self.names), len(new)
        rows = [(*row, *[0.0] * more) for row in self.cov]
        for at, (_, sd, _) in enumerate(new):
            rows.append((*[0.0] * (n + at), sd * sd, *[0.0] * (more - at - 1)))
        names, mean = [name for name, _, _ in new], [mean for _, _, mean in new]
        return Gaussian((*self.names, *names), (*self.mean, *mean), tuple(rows))

    def without(self, gone: Collection[Name]) -> Gaussian:
        """The same belief about the other unknowns."""
        stay = [at for at, name in enumerate(self.names) if name not in gone]
        n = len(stay)
        if n == len(self.names):
            return self
        if stay == list(range(n)):  # those gone came last
            return Gaussian(self.names[:n], self.mean[:n], tuple([line[:n] for line in self.cov[:n]]))
        return Gaussian(
            tuple([self.names[at] for at in stay]),
            tuple([self.mean[at] for at in stay]),
            tuple([tuple([line[j] for j in stay]) for line in [self.cov[i] for i in stay]]),
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

    def told(
        self, row: Mapping[Name, float], off: float, variance: float, spread: Sequence[float] | None = None
    ) -> Gaussian:
        """After a measurement of the weighted sum `row` came out `off` above what was expected; `variance`
        is that of its own error. `spread` of that row, where it was worked out already.

        Joseph's form, written so that both halves of the covariance come out with the same bits.
        """
        v = self.spread(row) if spread is None else spread
        total = self.weighed(row, v) + variance
        k = [x / total for x in v]
        root = sqrt(total)
        u = [x * root for x in k]
        mean = tuple(m + x * off for m, x in zip(self.mean, k, strict=True))
        cov = [
            line  # where nothing is in common nothing changes, to the bit
            if vi == 0.0
            else tuple(
                [p - (ki * vj + vi * kj) + ui * uj for p, vj, kj, uj in zip(line, v, k, u, strict=True)]
            )
            for line, vi, ki, ui in zip(self.cov, v, k, u, strict=True)
        ]
        return Gaussian(self.names, mean, tuple(cov))


@lru_cache(maxsize=64)
def _places(names: tuple[Name, ...]) -> dict[Name, int]:
    """Where each unknown stands."""
    return {name: at for at, name in enumerate(names)}
