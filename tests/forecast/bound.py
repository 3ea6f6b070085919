"""The least error that any linear estimator can have, worked out from drawn truths."""

from __future__ import annotations

from math import sqrt

import numpy as np
from numpy.typing import NDArray

from tests.forecast.truth import ALPHA, TURNS, Instruments, Truth, draw

BOUND_SEED = 10_000  # coils that no score is taken from


def grown(truth: Truth, coils: int) -> NDArray[np.float64]:
    """Resistance after every turn, one row a coil."""
    return np.array([draw(BOUND_SEED + i, truth).ohm for i in range(coils)])


def bound(
    sample: NDArray[np.float64],
    turns: NDArray[np.float64],
    meter: Instruments,
    *,
    resting: bool = False,
    cold: bool = False,
    each: int = 1,
) -> float:
    """Relative rms of the finished resistance: the posterior Cramer-Rao bound of a Gaussian truth.

    It has the sample's mean and covariance, and readings at `turns` with these instruments (Van Trees,
    Detection, Estimation, and Modulation Theory, part I, from memory). Each of `turns` stands for the mean of
    `each` readings near it.
    """
    final = sample[:, TURNS]
    if len(turns) == 0:
        return float(final.std(ddof=1) / final.mean())
    read = sample[:, turns.astype(int)]
    mean, moments = read.mean(axis=0), np.cov(read.T, final)
    common = meter.gain_sd**2 + (ALPHA * meter.celsius_sd) ** 2
    over = np.zeros(len(turns)) if cold else 1.0 - np.exp(-3.0 * turns / TURNS)
    warmth = ALPHA * meter.over_air_sd * over * mean
    own = ((meter.noise if resting else meter.turning_noise) * mean) ** 2 + meter.floor_ohm**2
    seen = moments[:-1, :-1] + common * np.outer(mean, mean) + np.outer(warmth, warmth) + meter.lead_sd**2
    along = moments[:-1, -1]
    variance = moments[-1, -1] - along @ np.linalg.solve(seen + np.diag(own / each), along)
    return sqrt(variance) / float(final.mean())
