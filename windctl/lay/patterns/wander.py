"""Wander: the guide's speed wanders around the pitch, as a hand's does.

The relative deviation x of the pitch from its mean is an Ornstein-Uhlenbeck process sampled once a turn,
in fixed point. Its correlation falls to 1/e over wander_turns; its standard deviation is `amount` times
a half.
"""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np
from numpy.typing import NDArray

from windctl.lay.draws import Stream, normals
from windctl.lay.fixed import nearest
from windctl.lay.spec import LaySpec
from windctl.lay.travel import Travel, by_turn

_BITS = 20  # of the recurrence's factors
_FULL = 1 << 15  # relative standard deviation of the pitch at amount 1, of 65536: a half
_MOST = 52429  # the pitch never deviates by more than four fifths, of 65536: the guide never stands or turns


def travel(spec: LaySpec) -> Travel:
    """One pitch a turn: the mean times 1 + amount / 2 * x, kept between a fifth and nine fifths of it."""
    deviation = np.clip((ornstein_uhlenbeck(spec) * spec.amount >> 16) * _FULL >> 16, -_MOST, _MOST)
    pitches = np.maximum(spec.pitch + (spec.pitch * deviation >> 16), 1)
    return by_turn(spec, pitches, bends=True)


def ornstein_uhlenbeck(spec: LaySpec) -> NDArray[np.int64]:
    """i64[turns]: x of unit standard deviation (65536), x' = keep * x + sqrt(1 - keep^2) * normal.

    keep = exp(-1/t) in its rational approximation (2t - 1) / (2t + 1), not below 0, t = spec.wander_turns.
    The first value is drawn from the stationary distribution, so that no turn is special.
    """
    t = spec.wander_turns
    keep = nearest(max(Fraction(0), (2 * t - 1) / (2 * t + 1)) * (1 << _BITS))
    kick = math.isqrt((1 << 2 * _BITS) - keep * keep)
    drawn = normals(spec.seed, Stream.WANDER, spec.turns)
    driven = drawn * kick + (1 << _BITS - 1)
    x = int(drawn[0])
    rest = driven[1:].tolist()  # plain integers: a recurrence that rounds at each step is no array operation
    return np.array([x, *[x := (keep * x + d) >> _BITS for d in rest]], dtype=np.int64)
