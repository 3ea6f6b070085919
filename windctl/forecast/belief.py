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
from typing import TypeAlias

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
    """Mean and covariance (symmetric to the bit) of the seven states after `turn` turns.

    `doubt`, 1 or more: by how much the variance of what is shown is more than the covariance says, since this
    coil's earlier forecasts were off by so much (`hindsight.py`).
    """

    turn: float
    mean: Vector
    cov: Matrix
    doubt: float = 1.0


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


def walk_of(prior: Prior, doubt: float = 1.0) -> Walk:
    """The walks of a prior; each relative sd of the prior is what its walk gathers over the planned turns.

    `doubt`: by how much packing and wire wander more than that, as a factor of the variance.
    """
    turns = max(prior.turns, 1.0)
    warm = 1.0 + ALPHA_20C * prior.coil_over_air_k  # as shown
    return Walk(
        growth=doubt * (prior.growth_walk_rel * prior.growth * warm) ** 2 / turns,
        per_turn=doubt * (prior.wire_walk_rel * prior.ohm_per_turn * warm) ** 2 / turns,
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
        belief.doubt,
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
    a0, a1, a2, a3, a4, a5, a6 = belief.cov[SHOWN]  # symmetric, so rows will do for columns
    b0, b1, b2, b3, b4, b5, b6 = belief.cov[LEADS]
    if cooled != 0.0:
        d0 -= ALPHA_20C * cooled * over / (1.0 + ALPHA_20C * off)
        seen = reading.ohm if isfinite(reading.ohm) else shown
        d6 = -ALPHA_20C * cooled * seen  # the secant, not the tangent
        c0, c1, c2, c3, c4, c5, c6 = belief.cov[OVER_AIR]
        b0, b1, b2, b3, b4, b5 = (
            b0 + d6 * c0,
            b1 + d6 * c1,
            b2 + d6 * c2,
            b3 + d6 * c3,
            b4 + d6 * c4,
            b5 + d6 * c5,
        )
        b6 += d6 * c6
    s0, s3, s6 = d0 * a0 + b0, d0 * a3 + b3, d0 * a6 + b6
    variance = d0 * s0 + s3
    if cooled != 0.0:
        variance += d6 * s6
    spread = (s0, d0 * a1 + b1, d0 * a2 + b2, s3, d0 * a4 + b4, d0 * a5 + b5, s6)
    return Look(d0 * shown + leads + contact_ohm, max(variance, 0.0), spread)


def told(belief: Belief, seen: Look, ohm: float, noise_variance: float) -> Belief:
    """The belief after a reading of `ohm`, whose own noise has this variance (above zero).

    P - (k v' + v k') + u u' with gain k = v/total and u u' = k total k', the upper half written out: the same
    bits as a loop over rows at a third less of what a reading costs.
    """
    total = seen.variance + max(noise_variance, (SHARPEST_REL * seen.ohm) ** 2)
    v0, v1, v2, v3, v4, v5, v6 = seen.spread
    k0, k1, k2, k3, k4, k5, k6 = (
        v0 / total,
        v1 / total,
        v2 / total,
        v3 / total,
        v4 / total,
        v5 / total,
        v6 / total,
    )
    root = sqrt(total)
    u0, u1, u2, u3, u4, u5, u6 = k0 * root, k1 * root, k2 * root, k3 * root, k4 * root, k5 * root, k6 * root
    step = ohm - seen.ohm
    m0, m1, m2, m3, m4, m5, m6 = belief.mean
    cov = belief.cov
    p00, p01, p02, p03, p04, p05, p06 = cov[0]
    _, p11, p12, p13, p14, p15, p16 = cov[1]
    _, _, p22, p23, p24, p25, p26 = cov[2]
    _, _, _, p33, p34, p35, p36 = cov[3]
    _, _, _, _, p44, p45, p46 = cov[4]
    _, _, _, _, _, p55, p56 = cov[5]
    p66 = cov[6][6]
    p00 = p00 - (k0 * v0 + v0 * k0) + u0 * u0
    p01 = p01 - (k0 * v1 + v0 * k1) + u0 * u1
    p02 = p02 - (k0 * v2 + v0 * k2) + u0 * u2
    p03 = p03 - (k0 * v3 + v0 * k3) + u0 * u3
    p04 = p04 - (k0 * v4 + v0 * k4) + u0 * u4
    p05 = p05 - (k0 * v5 + v0 * k5) + u0 * u5
    p06 = p06 - (k0 * v6 + v0 * k6) + u0 * u6
    p11 = p11 - (k1 * v1 + v1 * k1) + u1 * u1
    p12 = p12 - (k1 * v2 + v1 * k2) + u1 * u2
    p13 = p13 - (k1 * v3 + v1 * k3) + u1 * u3
    p14 = p14 - (k1 * v4 + v1 * k4) + u1 * u4
    p15 = p15 - (k1 * v5 + v1 * k5) + u1 * u5
    p16 = p16 - (k1 * v6 + v1 * k6) + u1 * u6
    p22 = p22 - (k2 * v2 + v2 * k2) + u2 * u2
    p23 = p23 - (k2 * v3 + v2 * k3) + u2 * u3
    p24 = p24 - (k2 * v4 + v2 * k4) + u2 * u4
    p25 = p25 - (k2 * v5 + v2 * k5) + u2 * u5
    p26 = p26 - (k2 * v6 + v2 * k6) + u2 * u6
    p33 = p33 - (k3 * v3 + v3 * k3) + u3 * u3
    p34 = p34 - (k3 * v4 + v3 * k4) + u3 * u4
    p35 = p35 - (k3 * v5 + v3 * k5) + u3 * u5
    p36 = p36 - (k3 * v6 + v3 * k6) + u3 * u6
    p44 = p44 - (k4 * v4 + v4 * k4) + u4 * u4
    p45 = p45 - (k4 * v5 + v4 * k5) + u4 * u5
    p46 = p46 - (k4 * v6 + v4 * k6) + u4 * u6
    p55 = p55 - (k5 * v5 + v5 * k5) + u5 * u5
    p56 = p56 - (k5 * v6 + v5 * k6) + u5 * u6
    p66 = p66 - (k6 * v6 + v6 * k6) + u6 * u6
    return Belief(
        belief.turn,
        (
            m0 + k0 * step,
            m1 + k1 * step,
            m2 + k2 * step,
            m3 + k3 * step,
            m4 + k4 * step,
            m5 + k5 * step,
            m6 + k6 * step,
        ),
        (
            (p00, p01, p02, p03, p04, p05, p06),
            (p01, p11, p12, p13, p14, p15, p16),
            (p02, p12, p22, p23, p24, p25, p26),
            (p03, p13, p23, p33, p34, p35, p36),
            (p04, p14, p24, p34, p44, p45, p46),
            (p05, p15, p25, p35, p45, p55, p56),
            (p06, p16, p26, p36, p46, p56, p66),
        ),
        belief.doubt,
    )


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
    variance += (belief.doubt - 1.0) * gradient[SHOWN] ** 2 * belief.cov[SHOWN][SHOWN]
    return belief.mean[SHOWN] / error_of(belief), sqrt(max(variance, 0.0))


def answer_covariance(belief: Belief, seen: Look) -> float:
    """Covariance of the true resistance with an expected reading."""
    return sum([d * x for d, x in zip(answer_gradient(belief), seen.spread, strict=True)])
