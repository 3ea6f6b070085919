"""A Gaussian belief about one growing coil, and the two things that change it: turns and readings.

The state, seven numbers:

    0  resistance so far at 20 degrees C        ohm
    1  ohm per turn, of the turn being laid     ohm
    2  growth of that per turn                  ohm per turn
    3  leads and contact                        ohm
    4  meter gain error                         relative
    5  thermometer bias                         K, reads too high
    6  coil over air                            K

Between turns the first three follow R += r*n + g*n*n/2, r += g*n exactly, while g walks (packing drifts), r
walks (wire drifts along the spool) and the coil's warmth walks. A reading shows

    y = (1 + gain) * (R * (1 + ALPHA * (celsius - bias + warmth*over - 20)) + leads + wire to the contact)

linearised at the mean: gain and temperature multiply R, all else is linear. The errors 3 to 6 are states,
so however many readings are taken, what they have in common never averages away.

The update is the Joseph form of a scalar measurement, written so that both halves of the covariance come
out with the same bits (Bierman, Factorization Methods for Discrete Sequential Estimation, 1977, chapter 2,
from memory).
"""

from __future__ import annotations

from dataclasses import dataclass
from math import sqrt
from typing import TypeAlias, cast

from windctl.material.copper import ALPHA_20C
from windctl.plan.prior import Prior

Vector: TypeAlias = tuple[float, float, float, float, float, float, float]
Matrix: TypeAlias = tuple[Vector, Vector, Vector, Vector, Vector, Vector, Vector]

OHM, PER_TURN, GROWTH, LEADS, GAIN, THERMOMETER, OVER_AIR = range(7)
_MOST_RELOOKS = 3
_FAR_MOVE = 9.0  # square of the own sds that a reading may move the resistance without a second look
WARMTH_WALK_SHARE = 0.5  # part of the variance of coil over air that comes and goes within one coil


@dataclass(frozen=True, slots=True)
class Belief:
    """Mean and covariance (symmetric, to the bit) of the seven states after `turn` turns."""

    turn: float
    mean: Vector
    cov: Matrix


@dataclass(frozen=True, slots=True)
class Walk:
    """How fast three states wander, as variance per turn."""

    growth: float
    per_turn: float
    over_air: float


@dataclass(frozen=True, slots=True)
class Look:
    """What a belief expects of one reading: `ohm`, its variance before the reading's own noise, and how every
    state goes along with it."""

    ohm: float
    variance: float
    spread: Vector  # covariance of every state with the expected reading


def walk_of(prior: Prior) -> Walk:
    """The walks of a prior; each relative sd of the prior is what its walk gathers over the planned turns."""
    turns = max(prior.turns, 1.0)
    return Walk(
        growth=(prior.growth_walk_rel * prior.growth) ** 2 / turns,
        per_turn=(prior.wire_walk_rel * prior.ohm_per_turn) ** 2 / turns,
        over_air=WARMTH_WALK_SHARE * prior.coil_over_air_sd**2 / turns,
    )


def first_belief(prior: Prior) -> Belief:
    """The belief before the first turn: no resistance yet, everything else as the plan and the profile have
    it."""
    turns = max(prior.turns, 1.0)
    slope = (prior.wire_slope_rel * prior.ohm_per_turn / turns) ** 2
    over = (1.0 - WARMTH_WALK_SHARE) * prior.coil_over_air_sd**2
    none = (0.0,) * 7
    return Belief(
        turn=0.0,
        mean=(0.0, prior.ohm_per_turn, prior.growth, prior.offset_ohm, 0.0, 0.0, prior.coil_over_air_k),
        cov=(
            (0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0),
            (0.0, prior.var_ohm_per_turn, prior.cov, 0.0, 0.0, 0.0, 0.0),
            (0.0, prior.cov, prior.var_growth + slope, 0.0, 0.0, 0.0, 0.0),
            (*none[:3], prior.offset_sd**2, 0.0, 0.0, 0.0),
            (*none[:4], prior.gain_sd**2, 0.0, 0.0),
            (*none[:5], prior.celsius_sd**2, 0.0),
            (*none[:6], over),
        ),
    )


def moved(belief: Belief, turn: float, walk: Walk) -> Belief:
    """The belief at another turn; going back (unwinding) widens it as going on does."""
    n = turn - belief.turn
    if n == 0.0:
        return belief
    h = 0.5 * n * n
    m0, m1, m2, m3, m4, m5, m6 = belief.mean
    (a0, a1, a2, a3, a4, a5, a6), (_, b1, b2, b3, b4, b5, b6), row2, row3, row4, row5, row6 = belief.cov
    _, _, c2, c3, c4, c5, c6 = row2

    # F P F' with F = [[1, n, h], [0, 1, n], [0, 0, 1]] on the first three states and 1 on the others
    x0, x1, x2 = a0 + n * a1 + h * a2, a1 + n * b1 + h * b2, a2 + n * b2 + h * c2
    y1, y2 = b1 + n * b2, b2 + n * c2
    p01, p11 = x1 + n * x2, y1 + n * y2
    p00 = x0 + n * x1 + h * x2
    a3, a4, a5, a6 = a3 + n * b3 + h * c3, a4 + n * b4 + h * c4, a5 + n * b5 + h * c5, a6 + n * b6 + h * c6
    b3, b4, b5, b6 = b3 + n * c3, b4 + n * c4, b5 + n * c5, b6 + n * c6

    # the walks in continuous turns, so that one long step and many short ones agree
    s = abs(n)
    g, r = walk.growth * s, walk.per_turn * s
    p00 += r * h * (2.0 / 3.0) + g * h * h / 5.0
    p01 += n * (0.5 * r + g * h * 0.25)
    p02 = x2 + g * h / 3.0
    p11 += r + g * h * (2.0 / 3.0)
    p12 = y2 + 0.5 * g * n
    p22 = c2 + g
    return Belief(
        turn,
        (m0 + n * m1 + h * m2, m1 + n * m2, m2, m3, m4, m5, m6),
        (
            (p00, p01, p02, a3, a4, a5, a6),
            (p01, p11, p12, b3, b4, b5, b6),
            (p02, p12, p22, c3, c4, c5, c6),
            (a3, b3, c3, *row3[3:]),
            (a4, b4, c4, *row4[3:]),
            (a5, b5, c5, *row5[3:]),
            (a6, b6, c6, *row6[3:5], row6[5], row6[6] + walk.over_air * s),
        ),
    )


def look(belief: Belief, celsius: float, warmth: float, contact_ohm: float, at: Vector | None = None) -> Look:
    """What this belief expects a reading to show now, with the wire to the contact (`contact_ohm`) in it.

    Linearised at the state `at`, else at the belief's mean.
    """
    ohm, _, _, leads, gain, bias, over = at or belief.mean
    scale = 1.0 + gain
    warm = 1.0 + ALPHA_20C * (celsius - bias + warmth * over - 20.0)
    raw = ohm * warm + leads + contact_ohm
    d0 = scale * warm
    d5 = -scale * ohm * ALPHA_20C
    d6 = -d5 * warmth
    s0, s1, s2, s3, s4, s5, s6 = [
        d0 * row[0] + scale * row[3] + raw * row[4] + d5 * row[5] + d6 * row[6] for row in belief.cov
    ]
    variance = d0 * s0 + scale * s3 + raw * s4 + d5 * s5 + d6 * s6
    expected = scale * raw
    if at is not None:
        m = belief.mean
        expected += d0 * (m[0] - ohm) + scale * (m[3] - leads) + raw * (m[4] - gain)
        expected += d5 * (m[5] - bias) + d6 * (m[6] - over)
    return Look(expected, max(variance, 0.0), (s0, s1, s2, s3, s4, s5, s6))


def learnt(
    belief: Belief, seen: Look, ohm: float, noise: float, celsius: float, warmth: float, contact_ohm: float
) -> Belief:
    """The belief after a reading of `ohm` with variance `noise`, `seen` being what it expected of it.

    A reading that moves the resistance by more than its own noise is linearised anew where it leads to
    (iterated extended Kalman filter). Without that, a first reading far from the prior and a second one
    near the first would see the gain through two different resistances, and claim to know it from the
    difference.
    """
    for _ in range(_MOST_RELOOKS):
        step = (ohm - seen.ohm) / (seen.variance + noise)
        if (seen.spread[OHM] * step) ** 2 <= _FAR_MOVE * noise:
            break
        m0, m1, m2, m3, m4, m5, m6 = [m + x * step for m, x in zip(belief.mean, seen.spread, strict=True)]
        seen = look(belief, celsius, warmth, contact_ohm, (m0, m1, m2, m3, m4, m5, m6))
    return told(belief, seen, ohm, noise)


def told(belief: Belief, seen: Look, ohm: float, noise_variance: float) -> Belief:
    """The belief after a reading of `ohm`, whose own noise has this variance (above zero)."""
    total = seen.variance + noise_variance
    v = seen.spread
    k = [x / total for x in v]
    root = sqrt(total)
    u = [x * root for x in k]
    step = ohm - seen.ohm
    m0, m1, m2, m3, m4, m5, m6 = [m + x * step for m, x in zip(belief.mean, k, strict=True)]
    rows = [
        tuple([p - (ki * vj + vi * kj) + ui * uj for p, vj, kj, uj in zip(row, v, k, u, strict=True)])
        for row, vi, ki, ui in zip(belief.cov, v, k, u, strict=True)
    ]
    return Belief(belief.turn, (m0, m1, m2, m3, m4, m5, m6), cast(Matrix, tuple(rows)))
