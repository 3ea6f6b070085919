"""What the readings of one finished coil say of it by themselves, whatever was believed before it was wound.

The coil's own estimate cannot be asked: what earlier coils had taught is in its prior, and would be learnt a
second time. So the readings are taken in once more from a prior that knows next to nothing of the coil, and
nothing of what the instruments have in common with every other coil's readings.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import sqrt

from windctl.forecast.belief import PER_TURN, SHOWN, Belief, first_belief, moved, resistance, walk_of
from windctl.forecast.estimator import Estimate
from windctl.plan.experience.basis import Basis
from windctl.plan.experience.lesson import Measured, Resistance, Share
from windctl.plan.prior import Prior

_WIRE_REL, _CORE_REL, _GROWTH_REL = 0.10, 0.05, 0.40  # next to nothing is known
_TELLS = 0.7  # a figure whose sd is not below this part of what it was without readings tells nothing


def open_minded(prior: Prior, basis: Basis) -> Prior:
    """`prior`'s instruments, less what they have in common for all coils, before a coil of unknown wire."""
    flat, grown = basis.ohm_per_turn, basis.growth_ohm
    return replace(
        prior,
        ohm_per_turn=flat,
        growth=grown,
        var_ohm_per_turn=(_WIRE_REL**2 + _CORE_REL**2) * flat**2,
        var_growth=(_WIRE_REL**2 + _GROWTH_REL**2) * grown**2,
        cov=_WIRE_REL**2 * flat * grown,
        gain_sd=0.0,
        celsius_sd=0.0,
        meter_cov=0.0,
    )


def taught(estimate: Estimate, turns: float) -> tuple[Measured, ...]:
    """Resistance of the finished coil, and how its turns grew; empty where no reading was used.

    `estimate` was begun with `open_minded`.
    """
    if estimate.used == 0:
        return ()
    last = moved(estimate.belief, turns, estimate.walk)
    first = moved(first_belief(estimate.prior), turns, walk_of(estimate.prior))
    seen: list[Measured] = []
    ohm = _less(_Figure(*resistance(last)), _Figure(*resistance(first)))
    if ohm is not None:
        seen.append(Resistance(ohm.value, ohm.sd / ohm.value))
    share = _less(_share(last), _share(first))
    if share is not None:
        seen.append(Share(share.value, share.sd))
    return tuple(seen)


@dataclass(frozen=True, slots=True)
class _Figure:
    value: float
    sd: float


def _share(belief: Belief) -> _Figure:
    """With R = r0*n + g*n^2/2 the part that the growth added is r(n)*n/R - 1."""
    ohm, per_turn = belief.mean[SHOWN], belief.mean[PER_TURN]
    by_turn = belief.turn / ohm
    by_ohm = -per_turn * belief.turn / ohm**2
    variance = (
        by_ohm**2 * belief.cov[SHOWN][SHOWN]
        + 2.0 * by_ohm * by_turn * belief.cov[SHOWN][PER_TURN]
        + by_turn**2 * belief.cov[PER_TURN][PER_TURN]
    )
    return _Figure(per_turn * belief.turn / ohm - 1.0, sqrt(max(belief.doubt * variance, 0.0)))


def _less(after: _Figure, before: _Figure) -> _Figure | None:
    """What was measured, if it made `after` out of `before`; None where that is next to nothing."""
    if not 0.0 < after.sd < _TELLS * before.sd:
        return None
    new, old = 1.0 / after.sd**2, 1.0 / before.sd**2
    told = new - old
    return _Figure((after.value * new - before.value * old) / told, sqrt(1.0 / told))
