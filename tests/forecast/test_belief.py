"""The Gaussian recursion: steps that compose, covariances that stay so, the batch solution as the judge."""

from __future__ import annotations

from dataclasses import replace
from math import sqrt

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.forecast.priors import shop, worked
from windctl.forecast.belief import (
    GAIN,
    GROWTH,
    OHM,
    PER_TURN,
    Belief,
    first_belief,
    learnt,
    look,
    moved,
    told,
    walk_of,
)


def matrix(belief: Belief) -> np.ndarray:
    return np.array(belief.cov)


def scaled_eigenvalues(belief: Belief) -> np.ndarray:
    """Of the correlation matrix: of order one, whatever the units."""
    cov = matrix(belief)
    sd = np.sqrt(np.diag(cov))
    return np.asarray(np.linalg.eigvalsh(cov / np.outer(sd, sd)))


def test_the_first_belief_is_the_prior() -> None:
    prior = shop()
    belief = first_belief(prior)
    assert belief.mean == (0.0, prior.ohm_per_turn, prior.growth, 0.5, 0.0, 0.0, 0.7)
    assert sqrt(belief.cov[GAIN][GAIN]) == pytest.approx(0.003)
    at_end = moved(belief, prior.turns, walk_of(prior))
    assert at_end.mean[OHM] == pytest.approx(5683.685, abs=0.01)  # the worked bobbin, turn by turn sum agrees
    assert at_end.cov[6][6] == pytest.approx(0.7**2)  # coil over air: the profile's sd once the coil is wound


@given(st.lists(st.floats(0.5, 900.0), min_size=1, max_size=12), st.floats(0.0, 4000.0))
def test_many_steps_are_one_step(steps: list[float], start: float) -> None:
    walk = walk_of(shop())
    first = moved(first_belief(shop()), start, walk)
    whole = moved(first, start + sum(steps), walk)
    parts = first
    for step in steps:
        parts = moved(parts, parts.turn + step, walk)
    np.testing.assert_allclose(parts.mean, whole.mean, rtol=1e-9)
    np.testing.assert_allclose(matrix(parts), matrix(whole), rtol=1e-7, atol=1e-18)


def test_going_back_returns_the_mean_and_never_narrows() -> None:
    walk = walk_of(shop())
    there = moved(first_belief(shop()), 5000.0, walk)
    back = moved(moved(there, 5100.0, walk), 5000.0, walk)
    np.testing.assert_allclose(back.mean, there.mean, rtol=1e-12)
    assert (np.diag(matrix(back)) >= np.diag(matrix(there)) * (1 - 1e-12)).all()


def test_the_gradient_is_the_derivative() -> None:
    """The expected reading against finite differences of the model, state by state."""
    belief = moved(first_belief(shop()), 3000.0, walk_of(shop()))
    seen = look(belief, 26.0, 0.6, 0.82)
    gradient = np.linalg.lstsq(matrix(belief)[:, [0, 3, 4, 5, 6]], np.array(seen.spread), rcond=None)[0]
    for place, state in enumerate((0, 3, 4, 5, 6)):
        step = 1e-4
        mean = list(belief.mean)
        mean[state] += step
        up = look(replace(belief, mean=tuple(mean)), 26.0, 0.6, 0.82).ohm  # type: ignore[arg-type]  # seven again
        assert gradient[place] == pytest.approx((up - seen.ohm) / step, rel=1e-3, abs=1e-3)


def test_equals_the_batch_solution() -> None:
    """No walks and no products: the recursion against one solution with a prior (numpy)."""
    prior = worked()
    rng = np.random.default_rng(4)
    turns = np.sort(rng.uniform(10, 6000, 40))
    ohms = prior.ohm_per_turn * 1.02 * turns + prior.growth * 0.97 * turns**2 / 2 + rng.normal(0, 1.5, 40)
    design = np.column_stack([turns, turns**2 / 2])
    p0 = np.array([[prior.var_ohm_per_turn, prior.cov], [prior.cov, prior.var_growth]])
    m0 = np.array([prior.ohm_per_turn, prior.growth])
    gain = p0 @ design.T @ np.linalg.inv(design @ p0 @ design.T + 1.5**2 * np.eye(40))
    batch = m0 + gain @ (ohms - design @ m0)

    belief, walk = first_belief(prior), walk_of(prior)
    for turn, ohm in zip(turns, ohms, strict=True):
        belief = moved(belief, float(turn), walk)
        belief = told(belief, look(belief, 20.0, 1.0, 0.0), float(ohm), 1.5**2)
    assert belief.mean[GROWTH] == pytest.approx(batch[1], rel=1e-6)
    assert belief.mean[PER_TURN] - belief.mean[GROWTH] * belief.turn == pytest.approx(batch[0], rel=1e-7)


def test_thousands_of_readings_keep_a_covariance() -> None:
    """Symmetric to the bit, no negative direction, no common error averaged away."""
    prior = shop()
    belief, walk = first_belief(prior), walk_of(prior)
    rng = np.random.default_rng(8)
    for turn in range(4, 8001, 4):
        belief = moved(belief, float(turn), walk)
        true = 1.03 * prior.ohm_per_turn * turn + 0.92 * prior.growth * turn**2 / 2
        noise = 0.2 + 0.001 * true
        belief = told(belief, look(belief, 22.0, 1.0, 0.82), true + float(rng.normal(0.0, noise)), noise**2)
    for _ in range(20_000):
        belief = told(belief, look(belief, 22.0, 1.0, 0.82), 6010.0 + float(rng.normal(0.0, 6.0)), 6.0**2)
    cov = matrix(belief)
    assert (cov == cov.T).all()
    assert scaled_eigenvalues(belief).min() > -1e-9
    common = sqrt(0.003**2 + (0.00393 * 0.5) ** 2 + (0.00393 * 0.7) ** 2)
    assert 0.93 * common < sqrt(cov[OHM][OHM]) / belief.mean[OHM] < 1.02 * common


@given(
    st.lists(
        st.tuples(st.floats(0.0, 400.0), st.floats(-0.3, 0.3), st.floats(0.001, 50.0), st.floats(5.0, 45.0)),
        min_size=1,
        max_size=25,
    )
)
def test_any_readings_keep_a_covariance(readings: list[tuple[float, float, float, float]]) -> None:
    belief, walk = first_belief(shop()), walk_of(shop())
    for step, off, sd, celsius in readings:
        belief = moved(belief, belief.turn + step, walk)
        seen = look(belief, celsius, 1.0, 0.82)
        belief = told(belief, seen, seen.ohm * (1.0 + off), sd * sd)
        cov = matrix(belief)
        assert (cov == cov.T).all()
        assert (np.diag(cov) >= 0.0).all()
        known = np.diag(cov) > 0.0
        sd_all = np.sqrt(np.diag(cov)[known])
        assert np.linalg.eigvalsh(cov[np.ix_(known, known)] / np.outer(sd_all, sd_all)).min() > -1e-9


def test_sharp_readings_far_from_the_prior_do_not_teach_the_common_errors() -> None:
    """The gain multiplies a resistance that the first reading moves by 8 %: seen through one resistance."""
    prior = shop()
    start = moved(first_belief(prior), 8000.0, walk_of(prior))
    belief = start
    for ohm in (6150.0, 6150.1, 6149.9, 6150.05):
        belief = learnt(belief, look(belief, 22.0, 1.0, 0.82), ohm, 0.05**2, 22.0, 1.0, 0.82)
    for state in (4, 5, 6):
        assert belief.cov[state][state] == pytest.approx(start.cov[state][state], rel=0.03)
    common = sqrt(0.003**2 + (0.00393 * 0.5) ** 2 + (0.00393 * 0.7) ** 2)
    assert sqrt(belief.cov[OHM][OHM]) / belief.mean[OHM] == pytest.approx(common, rel=0.03)
