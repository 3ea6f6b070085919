"""Propagation and least squares against the worked examples of JCGM 100:2008 (GUM) and NIST's certified fits.

The GUM's data and published results are from its annexes H.2 and H.3; a published digit may differ by one in
its last place, as the guide rounds on the way (its correlation coefficients have two digits).
"""

from __future__ import annotations

from math import cos, sin, sqrt
from statistics import mean

import numpy as np
import pytest

from windctl.shop.uncertainty import correlation, least_squares, propagated

VOLT = (5.007, 4.994, 5.005, 4.990, 4.999)
AMPERE = (19.663e-3, 19.639e-3, 19.640e-3, 19.685e-3, 19.678e-3)
PHASE = (1.0456, 1.0438, 1.0468, 1.0428, 1.0433)


def _covariance_of_means(*series: tuple[float, ...]) -> list[list[float]]:
    n = len(series[0])
    middles = [mean(one) for one in series]
    return [
        [
            sum((x - mi) * (y - mj) for x, y in zip(a, b, strict=True)) / (n * (n - 1))
            for b, mj in zip(series, middles, strict=True)
        ]
        for a, mi in zip(series, middles, strict=True)
    ]


def test_resistance_reactance_and_impedance_measured_at_once() -> None:
    """GUM H.2, table H.4: R 127.732 (0.071), X 219.847 (0.295), Z 254.260 (0.236) ohm, with the correlations
    r(R,X) -0.588, r(R,Z) -0.485, r(X,Z) 0.993."""
    v, i, phi = mean(VOLT), mean(AMPERE), mean(PHASE)
    z = v / i
    rows = [
        [cos(phi) / i, -z * cos(phi) / i, -z * sin(phi)],
        [sin(phi) / i, -z * sin(phi) / i, z * cos(phi)],
        [1 / i, -z / i, 0.0],
    ]
    out = propagated(rows, _covariance_of_means(VOLT, AMPERE, PHASE))
    published = (
        (z * cos(phi), 127.732, sqrt(out[0][0]), 0.071),
        (z * sin(phi), 219.847, sqrt(out[1][1]), 0.295),
        (z, 254.260, sqrt(out[2][2]), 0.236),
    )
    for value, said, sd, said_sd in published:
        assert value == pytest.approx(said, abs=1.01e-3)
        assert sd == pytest.approx(said_sd, abs=1.01e-3)
    assert correlation(out, 0, 1) == pytest.approx(-0.588, abs=1.01e-3)
    assert correlation(out, 0, 2) == pytest.approx(-0.485, abs=1.01e-3)
    assert correlation(out, 1, 2) == pytest.approx(0.993, abs=1.01e-3)


def test_a_thermometer_is_calibrated() -> None:
    """GUM H.3: intercept -0.1712 (0.0029), slope 0.00218 (0.00067), r -0.930, s 0.0035; the correction at
    30 degrees C is -0.1494 (0.0041)."""
    t = (21.521, 22.012, 22.512, 23.003, 23.507, 23.999, 24.513, 25.002, 25.503, 26.010, 26.511)
    b = (-0.171, -0.169, -0.166, -0.159, -0.164, -0.165, -0.156, -0.157, -0.159, -0.161, -0.160)
    fitted = least_squares([[1.0, x - 20.0] for x in t], b)
    assert fitted.values[0] == pytest.approx(-0.1712, abs=1.01e-4)
    assert fitted.values[1] == pytest.approx(0.00218, abs=1.01e-5)
    assert fitted.sd(0) == pytest.approx(0.0029, abs=1.01e-4)
    assert fitted.sd(1) == pytest.approx(0.00067, abs=1.01e-5)
    assert correlation(fitted.covariance, 0, 1) == pytest.approx(-0.930, abs=1.01e-3)
    assert sqrt(fitted.residual_square / fitted.freedom) == pytest.approx(0.0035, abs=1.01e-4)
    at = [1.0, 10.0]
    assert sum(x * y for x, y in zip(at, fitted.values, strict=True)) == pytest.approx(-0.1494, abs=1.01e-4)
    assert sqrt(propagated([at], fitted.covariance)[0][0]) == pytest.approx(0.0041, abs=1.01e-4)


def test_a_correlated_fit_is_what_numpy_makes_of_whitened_values() -> None:
    """An independent way: numpy's lstsq (singular values, no normal equations) on inv(L) times everything."""
    rng = np.random.default_rng(4)
    for n in (3, 5, 8):
        mixed = rng.normal(size=(n, n))
        u = mixed @ mixed.T + np.eye(n)
        a, y = rng.normal(size=(n, 2)), rng.normal(size=n)
        fitted = least_squares(a.tolist(), y.tolist(), u.tolist())
        lower = np.linalg.cholesky(u)
        x, square, *_ = np.linalg.lstsq(np.linalg.solve(lower, a), np.linalg.solve(lower, y))
        assert fitted.values == pytest.approx(tuple(x), rel=1e-9)
        assert np.array(fitted.weights) @ y == pytest.approx(x, rel=1e-9)
        expected = np.linalg.inv(a.T @ np.linalg.inv(u) @ a)
        assert np.array(fitted.covariance) == pytest.approx(expected, rel=1e-9)
        assert fitted.residual_square == pytest.approx(float(square[0]), rel=1e-9, abs=1e-12)


def test_values_that_say_the_same_thing_twice_are_refused() -> None:
    with pytest.raises(ValueError, match="independent"):
        least_squares([[1.0], [1.0]], [1.0, 2.0], [[1.0, 1.0], [1.0, 1.0]])
    with pytest.raises(ValueError, match="no scatter"):
        least_squares([[1.0]], [1.0])
