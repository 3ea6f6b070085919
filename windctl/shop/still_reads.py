"""Whether a coil still reads what it read before, and what all its readings together say of it cold.

Two readings by one meter agree far better than either is known: what they have in common drops out of their
difference. The covariance of readings follows from the sources they share (`cold_reading`); the difference
and the best value follow from it by the GUM's rules (`uncertainty`).

All is reckoned with relative errors about one common resistance. With each reading's own value in its place a
common gain would pull the best value below all readings (Peelle's puzzle, 1987, from memory).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import sqrt
from typing import Literal, TypeAlias

from windctl.forecast.finish import Z95
from windctl.shop.chi_square import beyond
from windctl.shop.cold_reading import OF_ONE, ColdReading, Source
from windctl.shop.uncertainty import Matrix, least_squares, propagated

Statement: TypeAlias = Literal["same", "changed", "cannot be told"]

WORTH_TELLING_PCT = 1.0  # a change that matters, unless somebody says otherwise; our judgement


@dataclass(frozen=True, slots=True)
class Shared:
    """A source that both readings have: its standard deviation, ohm, in each and in their difference."""

    name: str
    before_ohm: float
    after_ohm: float
    left_ohm: float


@dataclass(frozen=True, slots=True)
class Still:
    """`after` against `before`: their difference with its 95 % half-width, ohm at 20 degrees C.

    "same": the whole interval lies within the change that matters. "changed": it lies off zero.
    """

    statement: Statement
    before: ColdReading
    after: ColdReading
    difference_ohm: float
    u95_ohm: float
    matters_ohm: float
    shared: tuple[Shared, ...]

    @property
    def difference_pct(self) -> float:
        """The difference as a part of the reading before, per cent."""
        return 100.0 * self.difference_ohm / self.before.ohm


@dataclass(frozen=True, slots=True)
class Line:
    """One line of an uncertainty budget: an input, its standard deviation in `unit`, how the result goes with
    it (ohm per unit), and what of the result's standard uncertainty comes of it, ohm."""

    name: str
    sd: float
    unit: str
    slope_ohm: float

    @property
    def ohm(self) -> float:
        """Its contribution, a standard deviation."""
        return abs(self.slope_ohm) * self.sd


@dataclass(frozen=True, slots=True)
class ColdValue:
    """The coil at 20 degrees C from several readings, the weight of each, and the budget, largest line first.

    `residual_square` over `freedom`: how far the readings scatter, in units of what they should.
    """

    ohm: float
    sd: float
    readings: tuple[ColdReading, ...]
    weights: tuple[float, ...]
    budget: tuple[Line, ...]
    residual_square: float
    freedom: int

    @property
    def u95(self) -> float:
        """Half-width of the 95 % interval, ohm."""
        return Z95 * self.sd

    @property
    def chance(self) -> float | None:
        """How often readings of one resistance scatter as far as these or further; None for a single one."""
        return beyond(self.residual_square, self.freedom) if self.freedom > 0 else None


def covariance(readings: Sequence[ColdReading], about: float) -> Matrix:
    """Of the readings, ohm^2, their relative errors taken about a resistance of `about` ohm."""
    felt = [
        [
            about * by_reading[at].rel if at in by_reading else 0.0
            for by_reading in _sources(readings).values()
        ]
        for at in range(len(readings))
    ]
    independent = [[1.0 if i == j else 0.0 for j in range(len(felt[0]))] for i in range(len(felt[0]))]
    return propagated(felt, independent)


def still(before: ColdReading, after: ColdReading, change_pct: float = WORTH_TELLING_PCT) -> Still:
    """What two readings of one coil say of each other. `change_pct`: the least change that matters."""
    about = (before.ohm + after.ohm) / 2.0
    u = covariance((before, after), about)
    u95 = Z95 * sqrt(max(u[0][0] + u[1][1] - 2.0 * u[0][1], 0.0))
    difference = after.ohm - before.ohm
    matters = before.ohm * change_pct / 100.0
    statement: Statement = "cannot be told"
    if abs(difference) + u95 <= matters:
        statement = "same"
    elif abs(difference) > u95:
        statement = "changed"
    shared = tuple(
        Shared(name, about * abs(a.rel), about * abs(b.rel), about * abs(b.rel - a.rel))
        for name, by_reading in _sources((before, after)).items()
        if len(by_reading) == 2
        for a, b in [(by_reading[0], by_reading[1])]
        if a.rel and b.rel
    )
    return Still(statement, before, after, difference, u95, matters, shared)


def cold_value(readings: Sequence[ColdReading]) -> ColdValue:
    """The best value of readings of one resistance.

    Raises ValueError without readings, and for readings that cannot be weighed against each other.
    """
    if not readings:
        raise ValueError("there is no reading")
    about = sum(one.ohm for one in readings) / len(readings)
    fitted = least_squares(
        [[1.0]] * len(readings), [one.ohm for one in readings], covariance(readings, about)
    )
    ohm, weights = fitted.values[0], fitted.weights[0]
    lines = [_line(name, by_reading, weights, about) for name, by_reading in _sources(readings).items()]
    return ColdValue(
        ohm,
        fitted.sd(0),
        tuple(readings),
        weights,
        tuple(sorted((line for line in lines if line.ohm > 0.0), key=lambda line: (-line.ohm, line.name))),
        fitted.residual_square,
        fitted.freedom,
    )


def _line(name: str, by_reading: Mapping[int, Source], weights: Sequence[float], about: float) -> Line:
    first = next(iter(by_reading.values()))
    felt = sum(weights[at] * about * source.rel for at, source in by_reading.items())
    return Line(name, first.sd, first.unit, felt / first.sd if first.sd > 0.0 else 0.0)


def _sources(readings: Sequence[ColdReading]) -> dict[str, dict[int, Source]]:
    """Every independent source by name, with the readings (by place) that feel it."""
    sources: dict[str, dict[int, Source]] = {}
    for at, reading in enumerate(readings):
        for source in reading.sources:
            number = reading.number or at + 1
            name = f"{source.name} of reading {number}" if source.name in OF_ONE else source.name
            sources.setdefault(name, {})[at] = source
    return sources


def hidden_by(said: Still) -> list[tuple[str, float]]:
    """The sources that matter in the readings and cancel for the most part in their difference, each with
    what it is in one reading as a 95 % half-width, ohm; the largest first."""
    largest = max((one.before_ohm for one in said.shared), default=0.0)
    out = [
        (one.name, Z95 * one.before_ohm)
        for one in said.shared
        if one.left_ohm < 0.5 * one.before_ohm and one.before_ohm > 0.05 * largest
    ]
    return sorted(out, key=lambda each: -each[1])
