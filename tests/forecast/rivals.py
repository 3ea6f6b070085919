"""Other ways to forecast, to measure ours by: two rules of thumb, and our model in a general library."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

import numpy as np

from tests.forecast.truth import ALPHA
from windctl.forecast.belief import Belief, first_belief, resistance, walk_of
from windctl.forecast.noise import own_variance
from windctl.forecast.reading import Reading
from windctl.plan.prior import Prior


def at_20c(prior: Prior, reading: Reading) -> float:
    """The coil's resistance at 20 degrees C, taking every instrument at its word."""
    leads = prior.offset_ohm + prior.contact_length_ohm
    return (reading.ohm - leads) / (1.0 + ALPHA * (reading.celsius + prior.coil_over_air_k - 20.0))


def proportional(prior: Prior, readings: Sequence[Reading], turns: float) -> float:
    """Ohm per turn so far, times the turns."""
    return at_20c(prior, readings[-1]) * turns / readings[-1].turn


def parabola(prior: Prior, readings: Sequence[Reading], turns: float) -> float:
    """Least squares of a*n + b*n*n through all readings; with fewer than three, the rule above."""
    if len(readings) < 3:
        return proportional(prior, readings, turns)
    n = np.array([reading.turn for reading in readings])
    ohm = np.array([at_20c(prior, reading) for reading in readings])
    weight = 1.0 / (ohm * prior.noise_rel + prior.floor_ohm)
    (a, b), *_ = np.linalg.lstsq(np.column_stack([n, n * n]) * weight[:, None], ohm * weight, rcond=None)
    return float(a * turns + b * turns * turns)


class Filterpy:
    """The same states and walks in filterpy's KalmanFilter, without the gate."""

    def __init__(self, prior: Prior) -> None:
        from filterpy.kalman import KalmanFilter  # a test-time comparison, not a requirement

        self._prior, self._walk, start = prior, walk_of(prior), first_belief(prior)
        self._filter: Any = KalmanFilter(dim_x=7, dim_z=1)
        self._filter.x = np.array(start.mean)[:, None]
        self._filter.P = np.array(start.cov)
        self._turn = 0.0

    def move(self, turn: float) -> None:
        """On to another turn."""
        n, self._turn, x, walk = turn - self._turn, turn, self._filter.x[:, 0], self._walk
        f = np.eye(7)
        f[0, 1], f[0, 2], f[1, 2] = n, n * n / 2, n
        g, r = walk.growth, walk.per_turn
        q = np.zeros((7, 7))
        q[0, :3] = r * n**3 / 3 + g * n**5 / 20, r * n**2 / 2 + g * n**4 / 8, g * n**3 / 6
        q[1, :3] = q[0, 1], r * n + g * n**3 / 3, g * n**2 / 2
        q[2, :3] = q[0, 2], q[1, 2], g * n
        scale = np.zeros(7)
        scale[:3] = ALPHA / (1.0 + ALPHA * (x[6] - x[5])) * (f[:3, :3] @ x[:3])
        scale[6] = 1.0
        self._filter.predict(F=f, Q=q + walk.over_air * n * np.outer(scale, scale))

    def take(self, reading: Reading) -> None:
        """One more reading."""
        if reading.turn != self._turn:
            self.move(reading.turn)
        x = self._filter.x[:, 0]
        off = x[6] - x[5]
        d0 = (1.0 + ALPHA * (reading.celsius - 20.0 + off)) / (1.0 + ALPHA * off)
        h = np.array([[d0, 0.0, 0.0, 1.0, 0.0, 0.0, 0.0]])
        noise = own_variance(self._prior, reading, d0 * x[0])
        self._filter.update(reading.ohm - self._prior.contact_length_ohm, R=noise, H=h)

    def finish(self, turns: float) -> tuple[float, float]:
        """Finished resistance and its sd; the filter stays where it is."""
        here = self._turn, self._filter.x, self._filter.P
        self.move(turns)
        cov: Any = tuple(tuple(float(v) for v in row) for row in self._filter.P)
        mean: Any = tuple(float(v) for v in self._filter.x[:, 0])
        self._turn, self._filter.x, self._filter.P = here
        return resistance(Belief(turns, mean, cov))
