"""What an event on the bench leaves unknown: beliefs widened by exactly that."""

from __future__ import annotations

from dataclasses import replace
from math import sqrt
from typing import cast

from windctl.forecast.belief import GROWTH, PER_TURN, SHOWN, Belief, Matrix, Vector
from windctl.plan.prior import Prior

SPLICE_REL = 0.002  # ohm per metre on the two sides of a break: the end was pulled on
SPLICE_TURNS_SD = 1.0  # turns lost or wound twice at a splice
ANYTHING_REL = 0.5  # an opened resistance, and its slope, may be anything


def with_resistance_variance(belief: Belief, variance: float) -> Belief:
    """Add `variance` (ohm^2), independent of everything else, to the resistance so far."""
    return _added(belief, {(SHOWN, SHOWN): variance})


def with_wire_variance(belief: Belief, relative_variance: float, shift: float = 0.0) -> Belief:
    """From here on the wire has (1 + e) times its ohm per metre; e has mean `shift` and this variance."""
    m0, r, g, m3, m4, m5, m6 = belief.mean
    r, g = r * (1.0 + shift), g * (1.0 + shift)
    wider = _added(
        belief,
        {
            (PER_TURN, PER_TURN): relative_variance * r * r,
            (PER_TURN, GROWTH): relative_variance * r * g,
            (GROWTH, GROWTH): relative_variance * g * g,
        },
    )
    return replace(wider, mean=(m0, r, g, m3, m4, m5, m6))


def wire_sd_rel(prior: Prior) -> float:
    """Relative sd of ohm per metre in a prior: what its two coefficients have in common."""
    product = prior.ohm_per_turn * prior.growth
    if prior.cov > 0.0 and product > 0.0:
        return sqrt(prior.cov / product)
    return sqrt(prior.var_ohm_per_turn) / prior.ohm_per_turn


def opened(belief: Belief, prior: Prior) -> Belief:
    """A belief that has been proven wrong somewhere: resistance and ohm per turn are to be found anew."""
    free = (ANYTHING_REL * belief.mean[SHOWN]) ** 2 + (prior.turns * 0.01 * prior.ohm_per_turn) ** 2
    return with_wire_variance(with_resistance_variance(belief, free), ANYTHING_REL**2)


def with_new_wire(belief: Belief, expected: Belief, prior: Prior) -> Belief:
    """Another spool from here on: what was learnt of the old wire goes, what was learnt of the coil stays.

    `expected` is the belief at the same turn had there been no reading. With e the old wire's relative
    deviation and r the ohm per turn, e given r is normal with mean k*(r - r_expected), k =
    s^2*r_expected/var(r_expected), s the wire's relative sd; the new wire's deviation is drawn anew.
    """
    s2 = wire_sd_rel(prior) ** 2
    r = expected.mean[PER_TURN]
    variance = expected.cov[PER_TURN][PER_TURN]
    known = min(s2 * r * r / variance, 1.0) if variance > 0.0 else 0.0  # squared correlation of e and r
    old = known * (belief.mean[PER_TURN] / r - 1.0)
    return with_wire_variance(belief, s2 * (2.0 - known), -old / (1.0 + old))


def _added(belief: Belief, terms: dict[tuple[int, int], float]) -> Belief:
    rows = [list(row) for row in belief.cov]
    for (i, j), value in terms.items():
        rows[i][j] += value
        if i != j:
            rows[j][i] += value
    return replace(belief, cov=cast(Matrix, tuple(cast(Vector, tuple(row)) for row in rows)))
