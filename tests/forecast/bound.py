"""The least error that any linear estimator can have, worked out from drawn truths."""

from __future__ import annotations

from math import pi, sqrt

import numpy as np
from numpy.typing import NDArray

from tests.forecast.truth import ALPHA, CORE_M, GAP_MM, OHM_PER_M, TURNS, Instruments, Truth, draw

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


def least_without_readings(truth: Truth, coils: int = 20_000) -> tuple[float, float]:
    """Relative rms error of the best possible forecast where nothing is read, and its standard error.

    Nothing is known of a coil but from what it is drawn, so every forecast is one number c for all of them;
    the mean of (c/R - 1)^2 is least at c = E[1/R]/E[1/R^2], where it is 1 - E[1/R]^2/E[1/R^2].
    """
    ohm = _finished(truth, coils)
    c = np.mean(1.0 / ohm) / np.mean(1.0 / ohm**2)
    squares = (c / ohm - 1.0) ** 2
    least = float(np.sqrt(squares.mean()))
    return least, float(squares.std() / sqrt(coils) / (2.0 * least))


def _finished(truth: Truth, coils: int, parts: int = 80) -> NDArray[np.float64]:
    """Finished resistances drawn as `draw` does, but `parts` steps at a time and all coils at once."""
    rng = np.random.default_rng([20, BOUND_SEED])

    def anywhere(ends: tuple[float, float]) -> NDArray[np.float64]:
        return rng.uniform(*ends, (coils, 1))

    wire = rng.standard_normal((4 * coils, 1))
    wire = wire[np.abs(wire[:, 0]) <= 2.0][:coils]
    step = TURNS / parts
    km = CORE_M * 1.1e-3 * step
    walk = np.cumsum(rng.standard_normal((coils, parts)), axis=1) * truth.wire_walk * sqrt(km)
    x = (np.arange(parts) + 0.5) / parts
    walk = walk + anywhere(truth.wire_slope) * km * parts * x
    ohm_per_m = OHM_PER_M * (1.0 + truth.wire_sd * wire) * (1.0 + walk) * (1.0 + anywhere(truth.stretch))
    packing = anywhere(truth.packing) * (1.0 + anywhere(truth.packing_trend) * (2.0 * x - 1.0))
    layer = pi / 4.0 * anywhere(truth.overall_mm) ** 2 / (packing * GAP_MM) * step
    build = np.cumsum(layer, axis=1) - 0.5 * layer
    core = CORE_M * (1.0 + truth.core_sd * rng.standard_normal((coils, 1)))
    turn = core + 2e-3 * pi * anywhere(truth.crown) * build
    return np.asarray((ohm_per_m * turn).sum(axis=1) * step)
