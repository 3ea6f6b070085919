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
    PER_TURN,
    SHOWN,
    Belief,
    answer_gradient,
    first_belief,
    look,
    moved,
    resistance,
    told,
    walk_of,
)
from windctl.forecast.reading import Reading


def matrix(belief: Belief) -> np.ndarray:
    return np.array(belief.cov)


def scaled_eigenvalues(belief: Belief) -> np.ndarray:
    """Of the correlation matrix: of order one, whatever the units."""
    cov = matrix(belief)
    sd = np.sqrt(np.diag(cov))
    return np.asarray(np.linalg.eigvalsh(cov / np.outer(sd, sd)))


def reading(turn: float, ohm: float, celsius: float = 22.0, warmth: float = 1.0) -> Reading:
    return Reading(turn, ohm, celsius, resting=True, warmth=warmth)


def taken(belief: Belief, what: Reading, sd: float) -> Belief:
    return told(belief, look(belief, what, 0.82), what.ohm, sd * sd)


def test_the_first_belief_is_the_prior() -> None:
    """Without readings the answer is the plan's: instruments nobody has used say nothing."""
    prior = shop()
    start, walk = first_belief(prior), walk_of(prior)
    assert resistance(start) == (0.0, 0.0)
    ohm, sd = resistance(moved(start, prior.turns, walk))
    assert ohm == pytest.approx(5683.685, abs=0.01)  # the worked bobbin; its turn by turn sum agrees
    plain = replace(prior, gain_sd=0.0, celsius_sd=0.0, coil_over_air_sd=0.0, coil_over_air_k=0.0)
    assert sd == pytest.approx(
        resistance(moved(first_belief(plain), prior.turns, walk_of(plain)))[1], rel=1e-9
    )
    at_end = moved(start, prior.turns, walk)
    assert at_end.cov[6][6] == pytest.approx(0.7**2)  # coil over air: the profile's sd once the coil is wound


def test_what_is_shown_carries_the_meters_errors() -> None:
    """Relative variance of what is shown over what is true: 0.3 %, and 0.5 K and 0.7 K at 0.393 %/K."""
    prior = shop()
    belief = moved(first_belief(prior), prior.turns, walk_of(prior))
    warm = 1.0 + 0.00393 * 0.7
    common = 0.003**2 + (0.00393 / warm) ** 2 * (0.5**2 + 0.7**2)
    ohm, sd = resistance(belief)
    assert belief.mean[SHOWN] / ohm == pytest.approx(warm)
    shown_rel = belief.cov[SHOWN][SHOWN] / belief.mean[SHOWN] ** 2
    assert shown_rel - (sd / ohm) ** 2 == pytest.approx(common, rel=1e-6)


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


def test_a_reading_is_told_from_truth_by_the_model() -> None:
    """(1 + gain) * R * (1 + alpha*(T - bias + warmth*over - 20)) + leads, written out, for drawn errors."""
    prior = shop()
    belief = moved(first_belief(prior), 3000.0, walk_of(prior))
    true = 2100.0
    for gain, bias, over in ((0.004, 0.6, 1.9), (-0.003, -0.8, 0.1)):
        error = (1.0 + gain) * (1.0 + 0.00393 * (over - bias))
        mean = (true * error, *belief.mean[1:4], gain, bias, over)
        there = replace(belief, mean=mean)
        assert resistance(there)[0] == pytest.approx(true)
        for celsius, warmth in ((15.0, 1.0), (20.0, 0.0), (31.0, 0.3)):
            raw = (1.0 + gain) * true * (1.0 + 0.00393 * (celsius - bias + warmth * over - 20.0)) + 0.5 + 0.82
            assert look(there, reading(3000.0, raw, celsius, warmth), 0.82).ohm == pytest.approx(
                raw, rel=1e-5
            )


def test_the_answers_gradient_is_its_derivative() -> None:
    prior = shop()
    belief = moved(first_belief(prior), 3000.0, walk_of(prior))
    gradient = answer_gradient(belief)
    for state in range(7):
        step, mean = 1e-5, list(belief.mean)
        mean[state] += step
        moved_ohm = resistance(replace(belief, mean=tuple(mean)))[0]  # type: ignore[arg-type]  # seven again
        difference = (moved_ohm - resistance(belief)[0]) / step
        assert gradient[state] == pytest.approx(difference, rel=1e-3, abs=1e-6)


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
        seen = look(belief, reading(float(turn), float(ohm), 20.0), 0.0)
        belief = told(belief, seen, float(ohm), 1.5**2)
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
        belief = taken(belief, reading(turn, true + float(rng.normal(0.0, noise))), noise)
    for _ in range(20_000):
        belief = taken(belief, reading(8000.0, 6010.0 + float(rng.normal(0.0, 6.0))), 6.0)
    cov = matrix(belief)
    assert (cov == cov.T).all()
    assert scaled_eigenvalues(belief).min() > -1e-9
    common = sqrt(0.003**2 + (0.00393 * 0.5) ** 2 + (0.00393 * 0.7) ** 2)
    ohm, sd = resistance(belief)
    assert 0.95 * common < sd / ohm < 1.02 * common


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
        expected = look(belief, reading(belief.turn, 0.0, celsius), 0.82).ohm
        belief = taken(belief, reading(belief.turn, expected * (1.0 + off), celsius), sd)
        cov = matrix(belief)
        assert (cov == cov.T).all()
        assert (np.diag(cov) >= 0.0).all()
        known = np.diag(cov) > 0.0
        sd_all = np.sqrt(np.diag(cov)[known])
        assert np.linalg.eigvalsh(cov[np.ix_(known, known)] / np.outer(sd_all, sd_all)).min() > -1e-9


@pytest.mark.parametrize("warmth", [1.0, 0.0])
def test_sharp_readings_far_from_the_prior_do_not_teach_the_common_errors(warmth: float) -> None:
    """8 % off the plan and sharp to a hundred thousandth: what they have in common stays unknown."""
    prior = shop()
    start = moved(first_belief(prior), 8000.0, walk_of(prior))
    belief = start
    for ohm in (6150.0, 6150.1, 6149.9, 6150.05, 6150.0, 6149.95):
        belief = taken(belief, reading(8000.0, ohm, warmth=warmth), 0.05)
    for state in (GAIN, 5, 6):
        assert belief.cov[state][state] == pytest.approx(start.cov[state][state], rel=0.05)
    common = sqrt(0.003**2 + (0.00393 * 0.5) ** 2 + (0.00393 * 0.7 * warmth) ** 2)
    ohm, sd = resistance(belief)
    assert sd / ohm == pytest.approx(common, rel=0.02)
