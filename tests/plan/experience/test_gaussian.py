"""The named Gaussian against the textbook's matrices, worked out by numpy."""

from __future__ import annotations

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from windctl.plan.experience.gaussian import Gaussian

NAMES = (("level", "a"), ("slope", "a"), ("core", "b"), ("lay", "c"))
rel = st.floats(-1.0, 1.0)


@st.composite
def beliefs(draw: st.DrawFn) -> Gaussian:
    """Any belief about the four, with a covariance that is one."""
    root = np.array(draw(st.lists(st.lists(rel, min_size=4, max_size=4), min_size=4, max_size=4)))
    cov = root @ root.T + 0.01 * np.eye(4)
    cov = (cov + cov.T) / 2.0
    mean = draw(st.lists(rel, min_size=4, max_size=4))
    return Gaussian(NAMES, tuple(mean), tuple(tuple(float(v) for v in row) for row in cov))


rows = st.fixed_dictionaries(dict.fromkeys(NAMES, rel))


@given(belief=beliefs(), row=rows, off=rel, variance=st.floats(1e-4, 1.0))
def test_a_measurement_conditions_the_gaussian(
    belief: Gaussian, row: dict[tuple[str, str], float], off: float, variance: float
) -> None:
    """mean + P h (h'Ph + R)^-1 off, P - P h h'P / (h'Ph + R): the conditional of a joint normal."""
    told = belief.told(row, off, variance)
    p, h = np.array(belief.cov), np.array([row[name] for name in NAMES])
    total = h @ p @ h + variance
    np.testing.assert_allclose(told.mean, np.array(belief.mean) + p @ h * off / total, atol=1e-12)
    np.testing.assert_allclose(told.cov, p - np.outer(p @ h, p @ h) / total, atol=1e-10)
    cov = np.array(told.cov)
    assert (cov == cov.T).all()  # to the bit
    assert np.linalg.eigvalsh(cov).min() > -1e-12


@given(belief=beliefs(), factor=rel, variance=st.floats(0.0, 1.0))
def test_a_drift_is_a_linear_map_with_noise(belief: Gaussian, factor: float, variance: float) -> None:
    moved = belief.drifted(NAMES[0], NAMES[1], factor, variance)
    f = np.eye(4)
    f[0, 1] = factor
    q = np.zeros((4, 4))
    q[0, 0] = variance
    np.testing.assert_allclose(moved.mean, f @ np.array(belief.mean), atol=1e-12)
    np.testing.assert_allclose(moved.cov, f @ np.array(belief.cov) @ f.T + q, atol=1e-12)
    cov = np.array(moved.cov)
    assert (cov == cov.T).all()


@given(belief=beliefs(), first=rows, second=rows)
def test_covariances_of_sums(
    belief: Gaussian, first: dict[tuple[str, str], float], second: dict[tuple[str, str], float]
) -> None:
    a, b = (np.array([row[name] for name in NAMES]) for row in (first, second))
    assert np.isclose(belief.covariance(first, second), a @ np.array(belief.cov) @ b, atol=1e-12)
    assert np.isclose(belief.along(first), a @ np.array(belief.mean), atol=1e-12)


@given(belief=beliefs())
def test_unknowns_come_and_go_without_touching_the_others(belief: Gaussian) -> None:
    more = belief.having(("meter", "d"), 0.5, 0.25)
    assert (more.value(("meter", "d")), more.sd(("meter", "d"))) == (0.25, 0.5)
    assert more.having(("meter", "d"), 9.0) == more
    assert more.without([("meter", "d")]) == belief
    assert belief.without(NAMES) == Gaussian()
    assert belief.value(("meter", "d")) == 0.0
