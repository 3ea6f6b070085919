"""A Gaussian belief about one growing coil, and the two things that change it: turns and readings.

The state, seven numbers:

    0  resistance so far, as shown              ohm
    1  ohm per turn, of the turn being laid     ohm, as shown
    2  growth of that per turn                  ohm per turn, as shown
    3  leads and contact                        ohm
    4  meter gain error                         relative
    5  thermometer bias                         K, reads too high
    6  coil over air                            K

"As shown" means: as this meter would show it with this thermometer at 20 degrees C beside this warm coil. It
is the true value at 20 degrees C times

    error = (1 + gain) * (1 + ALPHA * (over - bias))

A reading then is linear in the state: shown * (1 + ALPHA * (celsius - 20)) + leads + wire to the contact.
The errors 4 to 6 are in the start of the first three states and in the answer, `resistance`, and nowhere
between: however many readings are taken, and however sharp they are, what they have in common never
averages away. With the true resistance as the state, sharp readings would bend the belief round a curve
(gain times resistance) that no Gaussian can follow.

Between turns the first three follow R += r*n + g*n*n/2, r += g*n exactly, while g walks (packing drifts), r
walks (wire drifts along the spool) and the coil's warmth walks, which scales all three.

The update is the Joseph form of a scalar measurement, written so that both halves of the covariance come
out with the same bits (Bierman, Factorization Methods for Discrete Sequential Estimation, 1977, from
memory).
"""

from __future__ import annotations

from dataclasses import dataclass
from math import isfinite, sqrt
from typing import TypeAlias, cast

from windctl.forecast.reading import Reading
from windctl.material.copper import ALPHA_20C
from windctl.plan.prior import Prior

Vector: TypeAlias = tuple[float, float, float, float, float, float, float]
Matrix: TypeAlias = tuple[Vector, Vector, Vector, Vector, Vector, Vector, Vector]

SHOWN, PER_TURN, GROWTH, LEADS, GAIN, THERMOMETER, OVER_AIR = range(7)
WARMTH_WALK_SHARE = 0.5  # part of the variance of coil over air that comes and goes within one coil
SHARPEST_REL = 2e-5  # what the temperature's small products leave out; no reading counts as sharper


@dataclass(frozen=True, slots=True)
class Belief:
    """Mean and covariance (symmetric to the bit) of the seven states after `turn` turns."""

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
    """What a belief expects of one reading: `ohm`, and its variance before the reading's own noise."""

    ohm: float
    variance: float
    spread: Vector  # covariance of every state with the expected reading


def walk_of(prior: Prior) -> Walk:
    """The walks of a prior; each relative sd of the prior is what its walk gathers over the planned turns."""
    turns = max(prior.turns, 1.0)
    warm = 1.0 + ALPHA_20C * prior.coil_over_air_k  # as shown
    return Walk(
        growth=(prior.growth_walk_rel * prior.growth * warm) ** 2 / turns,
        per_turn=(prior.wire_walk_rel * prior.ohm_per_turn * warm) ** 2 / turns,
        over_air=WARMTH_WALK_SHARE * prior.coil_over_air_sd**2 / turns,
    )


def first_belief(prior: Prior) -> Belief:
    """The belief before the first turn: no resistance yet, all else as plan and profile have it."""
    turns = max(prior.turns, 1.0)
    slope = (prior.wire_slope_rel * prior.ohm_per_turn / turns) ** 2
    gain, thermometer = prior.gain_sd**2, prior.celsius_sd**2
    over = (1.0 - WARMTH_WALK_SHARE) * prior.coil_over_air_sd**2
    warm = 1.0 + ALPHA_20C * prior.coil_over_air_k
    by_bias, by_over = -ALPHA_20C / warm * thermometer, ALPHA_20C / warm * over  # with the log of `error`
    error = gain + ALPHA_20C / warm * (by_over - by_bias)  # its relative variance
    learnt = 1.0 + prior.meter_cov / error if error > 0.0 else 1.0  # what of it is not in the prior already
    gain_too, by_bias, by_over = learnt * gain, learnt * by_bias, learnt * by_over
    error += 2.0 * prior.meter_cov if error > 0.0 else 0.0
    r, g = prior.ohm_per_turn * warm, prior.growth * warm
    square = warm * warm
    rr = prior.var_ohm_per_turn * square + error * r * r
    rg = prior.cov * square + error * r * g
    gg = (prior.var_growth + slope) * square + error * g * g
    return Belief(
        turn=0.0,
        mean=(0.0, r, g, prior.offset_ohm, 0.0, 0.0, prior.coil_over_air_k),
        cov=(
            (0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0),
            (0.0, rr, rg, 0.0, r * gain_too, r * by_bias, r * by_over),
            (0.0, rg, gg, 0.0, g * gain_too, g * by_bias, g * by_over),
            (0.0, 0.0, 0.0, prior.offset_sd**2, 0.0, 0.0, 0.0),
            (0.0, r * gain_too, g * gain_too, 0.0, gain, 0.0, 0.0),
            (0.0, r * by_bias, g * by_bias, 0.0, 0.0, thermometer, 0.0),
            (0.0, r * by_over, g * by_over, 0.0, 0.0, 0.0, over),
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
    m0, m1 = m0 + n * m1 + h * m2, m1 + n * m2

    # what the coil's warmth does meanwhile scales all that is shown
    w = walk.over_air * s
    if w > 0.0:
        u = ALPHA_20C / (1.0 + ALPHA_20C * (m6 - m5))
        u0, u1, u2 = u * m0, u * m1, u * m2
        v0, v1, v2 = u0 * w, u1 * w, u2 * w
        p00, p01, p02 = p00 + u0 * v0, p01 + u0 * v1, p02 + u0 * v2
        p11, p12, p22 = p11 + u1 * v1, p12 + u1 * v2, p22 + u2 * v2
        a6, b6, c6 = a6 + v0, b6 + v1, c6 + v2
    return Belief(
        turn,
        (m0, m1, m2, m3, m4, m5, m6),
        (
            (p00, p01, p02, a3, a4, a5, a6),
            (p01, p11, p12, b3, b4, b5, b6),
            (p02, p12, p22, c3, c4, c5, c6),
            (a3, b3, c3, *row3[3:]),
            (a4, b4, c4, *row4[3:]),
            (a5, b5, c5, *row5[3:]),
            (a6, b6, c6, *row6[3:6], row6[6] + w),
        ),
    )


def look(belief: Belief, reading: Reading, contact_ohm: float, share: float = 1.0) -> Look:
    """What this belief expects a reading to show, with the wire to the contact (`contact_ohm`) in it.

    `share` of the coil's warmth is left, besides what the reading itself says of it.
    """
    shown, _, _, leads, _, bias, over = belief.mean
    off = over - bias
    warm = 1.0 + ALPHA_20C * (reading.celsius - 20.0 + off)
    d0 = warm / (1.0 + ALPHA_20C * off)
    cooled = 1.0 - reading.warmth * share
    if cooled == 0.0:
        s0, s1, s2, s3, s4, s5, s6 = [d0 * row[0] + row[3] for row in belief.cov]
        return Look(d0 * shown + leads + contact_ohm, max(d0 * s0 + s3, 0.0), (s0, s1, s2, s3, s4, s5, s6))
    d0 -= ALPHA_20C * cooled * over / (1.0 + ALPHA_20C * off)
    d6 = (
        -ALPHA_20C * cooled * (reading.ohm if isfinite(reading.ohm) else shown)
    )  # the secant, not the tangent
    s0, s1, s2, s3, s4, s5, s6 = [d0 * row[0] + row[3] + d6 * row[6] for row in belief.cov]
    variance = d0 * s0 + s3 + d6 * s6
    return Look(d0 * shown + leads + contact_ohm, max(variance, 0.0), (s0, s1, s2, s3, s4, s5, s6))


def told(belief: Belief, seen: Look, ohm: float, noise_variance: float) -> Belief:
    """The belief after a reading of `ohm`, whose own noise has this variance (above zero)."""
    total = seen.variance + max(noise_variance, (SHARPEST_REL * seen.ohm) ** 2)
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


def error_of(belief: Belief) -> float:
    """What is shown at 20 degrees C over what is true."""
    _, _, _, _, gain, bias, over = belief.mean
    return (1.0 + gain) * (1.0 + ALPHA_20C * (over - bias))


def answer_gradient(belief: Belief) -> Vector:
    """How the true resistance at 20 degrees C goes with each state."""
    shown, _, _, _, gain, bias, over = belief.mean
    error = error_of(belief)
    ohm = shown / error
    by_kelvin = ohm * ALPHA_20C / (1.0 + ALPHA_20C * (over - bias))
    return (1.0 / error, 0.0, 0.0, 0.0, -ohm / (1.0 + gain), by_kelvin, -by_kelvin)


def resistance(belief: Belief) -> tuple[float, float]:
    """True resistance at 20 degrees C, and its standard deviation with every error in it, ohm."""
    gradient = answer_gradient(belief)
    variance = 0.0
    for di, row in zip(gradient, belief.cov, strict=True):
        if di != 0.0:
            variance += di * sum([dj * p for dj, p in zip(gradient, row, strict=True)])
    return belief.mean[SHOWN] / error_of(belief), sqrt(max(variance, 0.0))


def answer_covariance(belief: Belief, seen: Look) -> float:
    """Covariance of the true resistance with an expected reading."""
    return sum([d * x for d, x in zip(answer_gradient(belief), seen.spread, strict=True)])
