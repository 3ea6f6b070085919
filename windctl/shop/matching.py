"""Coils in stock -> the best hum-cancelling pairs. Pure.

A pair has opposite magnets; its wires may run either way. Its cost is the expected square of what is left of
the hum: that of the difference of the turns-areas over their sum, with its uncertainty.
"""

from __future__ import annotations

from collections.abc import Hashable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from windctl.shop.enclosed import Enclosed
from windctl.shop.hum import Left, Mismatch, Seat, near_source
from windctl.shop.joining import Handed, Joined, join
from windctl.shop.pairing import best_pairs

F64 = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Candidate:
    """A coil that may be paired. `order`: coils stand in the order of their numbers; `form`: only coils of
    one form are paired, unless they are let; `half_width_mm`: from its middle to the flange's edge."""

    handed: Handed
    order: tuple[str, int, int]
    form: Hashable
    gap_mm: float
    half_width_mm: float


@dataclass(frozen=True, slots=True)
class Sitting:
    """How the two coils of a pair sit: side by side across their length, or stacked; `apart_mm` from middle
    to middle, None: as close as their flanges let them."""

    stacked: bool = False
    apart_mm: float | None = None

    def between(self, one: Candidate, other: Candidate) -> float:
        """From middle to middle, mm."""
        if self.apart_mm is not None:
            return self.apart_mm
        if self.stacked:
            return (one.gap_mm + other.gap_mm) / 2 + 2 * _FLANGE_MM
        return one.half_width_mm + other.half_width_mm


_FLANGE_MM = 1.5  # a flange's thickness, where coils are stacked. Our judgement


@dataclass(frozen=True, slots=True)
class Pair:
    """Two coils, by their places among the candidates: `north` and `south` are towards the strings.

    `left` in a uniform field, `near` of a source a metre away, the coils `apart_mm` apart.
    """

    north: int
    south: int
    mismatch: Mismatch
    near: Left
    apart_mm: float
    joined: Joined

    @property
    def left(self) -> Left:
        """Hum left in a uniform field, without steel."""
        return self.mismatch.left


def costs(told: Enclosed, north: Sequence[int], south: Sequence[int]) -> F64:
    """f64[north, south]: the expected squared residual of each pair."""
    area = np.log([told.turns_area_m2(at) for at in range(len(told.turns))])
    ratio = area[list(north)][:, None] - area[list(south)][None, :]
    variance, cov = np.diag(told.log_cov), told.log_cov[np.ix_(north, south)]
    spread = np.maximum(variance[list(north)][:, None] + variance[list(south)][None, :] - 2 * cov, 0.0)
    mean = np.tanh(ratio / 2)
    square: F64 = mean**2 + (1 - mean**2) ** 2 * spread / 4
    return square


def best(
    candidates: Sequence[Candidate],
    told: Enclosed,
    sitting: Sitting,
    *,
    at_most_db: float | None = None,
    any_form: bool = False,
) -> tuple[Pair, ...]:
    """As many pairs as can be, of these the ones with the least squares in all, ties by number; in the order
    of the north coils. `told` has the candidates in the same places; `at_most_db`: pairs that leave more hum
    in a uniform field are none."""
    by_number = sorted(range(len(candidates)), key=lambda at: candidates[at].order)
    north = [at for at in by_number if candidates[at].handed.pole == "north"]
    south = [at for at in by_number if candidates[at].handed.pole == "south"]
    if not (north and south):
        return ()
    each = costs(told, north, south)
    if at_most_db is not None:
        each = np.where(each > 10 ** (at_most_db / 10), np.inf, each)
    if not any_form:
        alike = [[candidates[n].form == candidates[s].form for s in south] for n in north]
        each = np.where(alike, each, np.inf)
    pairs = [(north[row], south[column]) for row, column in best_pairs(each)]
    return tuple(_pair(candidates, told, sitting, *pair) for pair in pairs)


def _pair(candidates: Sequence[Candidate], told: Enclosed, sitting: Sitting, north: int, south: int) -> Pair:
    one, other = candidates[north], candidates[south]
    mismatch, apart = told.mismatch(north, south), sitting.between(one, other)
    seats = [
        Seat(told.windings[at].core, told.windings[at].growth_mm, candidates[at].gap_mm)
        for at in (north, south)
    ]
    near = near_source(seats[0], seats[1], apart, sitting.stacked, mismatch)
    return Pair(north, south, mismatch, near, apart, join(one.handed, other.handed))
