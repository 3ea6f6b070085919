"""What a coil picks up of a field at mains frequency, and what two coils leave of it between them.

Hum left is told relative to what both coils pick up in phase, as a level: with turns-areas S1 and S2 joined
so that their hum cancels, r = (S1 - S2)/(S1 + S2) is left, 20*log10|r| dB. For S2 = S1*(1 + m) that is
20*log10(m/(2 + m)).

r is known with an uncertainty, and its absolute value is what counts: the expected square is mean^2 + sd^2,
and |r| follows a folded normal distribution, from whose quantiles the interval comes.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from functools import lru_cache
from statistics import NormalDist

import numpy as np

from windctl.coil.dipole import F64, Placed, all_round, linkage
from windctl.coil.geometry import Core
from windctl.coil.turns_area import Winding

MAINS_HZ = (50.0, 60.0)
SOURCE_M = 1.0  # where the near source of the honest limit stands
FLOOR_DB = -200.0  # of a level that is nothing at all, and of what no meter would find

_NORMAL = NormalDist()
_LOW, _HIGH = 0.025, 0.975
_HALVINGS = 80
_STEPS = 9  # over the interval of r


def hum_volt(turns_area_m2: float, hz: float, tesla: float = 1e-6) -> float:
    """V = 2*pi*f*B*N*A in a uniform field along the coil's axis, without steel: amplitude for amplitude."""
    return 2 * math.pi * hz * tesla * turns_area_m2


def level_db(ratio: float) -> float:
    """20*log10|ratio|."""
    return max(20 * math.log10(abs(ratio)), FLOOR_DB) if ratio else FLOOR_DB


@dataclass(frozen=True, slots=True)
class Left:
    """Hum left by a pair, in dB against both in phase: of the expected square, and 95 % of what it may be."""

    db: float
    low_db: float
    high_db: float


@dataclass(frozen=True, slots=True)
class Mismatch:
    """r = (S1 - S2)/(S1 + S2), its mean and standard deviation."""

    mean: float
    sd: float

    @property
    def square(self) -> float:
        """The expected squared residual: what a pair costs."""
        return self.mean**2 + self.sd**2

    @property
    def left(self) -> Left:
        """In a uniform field, without steel."""
        low, high = folded(self.mean, self.sd)
        return Left(level_db(math.sqrt(self.square)), level_db(low), level_db(high))


def mismatch_of(log_ratio: float, sd: float) -> Mismatch:
    """From the mean and standard deviation of ln(S1/S2): r = tanh of half of it."""
    mean = math.tanh(log_ratio / 2)
    return Mismatch(mean, (1 - mean**2) * sd / 2)


def folded(mean: float, sd: float, low: float = _LOW, high: float = _HIGH) -> tuple[float, float]:
    """Quantiles of |x| for a normal x."""
    if sd <= 0:
        return abs(mean), abs(mean)
    return _folded_quantile(abs(mean), sd, low), _folded_quantile(abs(mean), sd, high)


def _folded_quantile(mean: float, sd: float, part: float) -> float:
    """Where P(|x| < q) = part: halved again and again, since no closed form is."""
    below, above = 0.0, mean + 10 * sd
    for _ in range(_HALVINGS):
        q = (below + above) / 2
        if _NORMAL.cdf((q - mean) / sd) - _NORMAL.cdf((-q - mean) / sd) < part:
            below = q
        else:
            above = q
    return (below + above) / 2


@dataclass(frozen=True, slots=True)
class Seat:
    """One coil of a pair as it sits in the instrument."""

    core: Core
    growth_mm: float
    gap_mm: float

    @property
    def rounded(self) -> Seat:
        """With a growth of whole tenths of a mm: a metre away nothing of the rest is seen."""
        return replace(self, growth_mm=round(self.growth_mm, 1))

    def seen(self, at_mm: tuple[float, float, float], sources_m: F64) -> F64:
        """f64[n, 3]: flux per dipole moment and turns-area with its middle there, Wb per A m2 and m2."""
        area_m2 = Winding(self.core, self.growth_mm).mean_area_mm2 * 1e-6
        seen: F64 = linkage(Placed(self.core, self.growth_mm, self.gap_mm, at_mm), sources_m) / area_m2
        return seen


def near_source(first: Seat, second: Seat, apart_mm: float, stacked: bool, mismatch: Mismatch) -> Left:
    """Hum left of a dipole a metre from the pair's middle, the coils' middles `apart_mm` apart: side by side
    across their length, or stacked. At the worst place round the pair, the dipole's own axis turned so that
    most is left there, against what both pick up in phase when it is turned for that.

    With u1 and u2 what each coil of unit turns-area sees, u1 - u2 + r*(u1 + u2) is left of u1 + u2 +
    r*(u1 - u2): even of coils that match in every way, u1 - u2 is.
    """
    apart, together = _seen(first.rounded, second.rounded, apart_mm, stacked)

    def squares(r: float) -> tuple[float, float]:
        """The worst, with r as it is, and with its spread."""
        left = np.sum((apart + r * together) ** 2, axis=1)
        whole = np.sum((together + r * apart) ** 2, axis=1)
        spread = mismatch.sd**2 * np.sum(together**2, axis=1)
        return float((left / whole).max()), float(((left + spread) / whole).max())

    expected = level_db(math.sqrt(squares(mismatch.mean)[1]))
    z = _NORMAL.inv_cdf(_HIGH)
    around = [mismatch.mean + z * mismatch.sd * (2 * step / (_STEPS - 1) - 1) for step in range(_STEPS)]
    levels = [level_db(math.sqrt(squares(r)[0])) for r in around]
    return Left(expected, min(levels), max(levels))


@lru_cache(maxsize=64)  # the pairs of a lot sit alike
def _seen(first: Seat, second: Seat, apart_mm: float, stacked: bool) -> tuple[F64, F64]:
    """u1 - u2 and u1 + u2 for places of the source all round."""
    half, sources = apart_mm / 2, SOURCE_M * all_round()
    shift = (0.0, 0.0, half) if stacked else (0.0, half, 0.0)
    back = (0.0, 0.0, -half) if stacked else (0.0, -half, 0.0)
    one, other = first.seen(shift, sources), second.seen(back, sources)
    return one - other, one + other
