"""Readings that contradict the plan: another wire than was said, or another core.

Where plan and readings disagree, a Gaussian lets both give way by their variances: the meter, whose gain is
known to parts in a thousand, would be called wrong by per cents to save a plan that knows its wire well, and
the answer would come to lie between the two with the narrow interval of both. So how far the readings have
bent what is believed of the instruments is watched. What may be bent is what the readings have told of it;
beyond `BEYOND` standard deviations of that the plan is at fault, and the coil is believed as if nothing had
been known of its wire: as the meter shows it, and as unsure as the meter is.
"""

from __future__ import annotations

from math import log, sqrt

from windctl.forecast.belief import (
    GAIN,
    OVER_AIR,
    SHOWN,
    THERMOMETER,
    Belief,
    Look,
    Walk,
    error_of,
    moved,
    told,
)
from windctl.forecast.widen import ANYTHING_REL, with_wire_variance
from windctl.material.copper import ALPHA_20C

BEYOND = 3.6  # standard deviations; readings that agree with their plan go there once in 3 000


def contradicted(belief: Belief, reference: Belief, walk: Walk) -> Belief | None:
    """The belief to go on with where `belief` cannot be had without calling the instruments wrong; else None.

    `reference` is what was believed before any of the readings behind `belief`.
    """
    bent = abs(log(error_of(belief) / error_of(reference)))
    before = _error_variance(reference) + (ALPHA_20C**2 * walk.over_air * abs(belief.turn - reference.turn))
    told_of_it = before - _error_variance(belief)
    if told_of_it <= 1e-6 * before or bent <= BEYOND * sqrt(told_of_it):
        return None
    open_wire = moved(with_wire_variance(reference, ANYTHING_REL**2), belief.turn, walk)
    before_it = Look(open_wire.mean[SHOWN], open_wire.cov[SHOWN][SHOWN], open_wire.cov[SHOWN])
    return told(open_wire, before_it, belief.mean[SHOWN], belief.cov[SHOWN][SHOWN])


def _error_variance(belief: Belief) -> float:
    """Variance of the logarithm of what is shown over what is true, in as far as the instruments make it."""
    by = {GAIN: 1.0, THERMOMETER: -ALPHA_20C, OVER_AIR: ALPHA_20C}
    return sum(di * dj * belief.cov[i][j] for i, di in by.items() for j, dj in by.items())
