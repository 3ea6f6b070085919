"""The recursion against published and independently computed figures."""

from __future__ import annotations

from dataclasses import replace
from math import sqrt

import numpy as np
import pytest

from tests.forecast.priors import certain, worked
from windctl.forecast.belief import GROWTH, LEADS, PER_TURN, SHOWN
from windctl.forecast.estimator import Estimate, begin, update
from windctl.forecast.finish import finish_at
from windctl.forecast.reading import Reading


def test_linear_reference_case() -> None:
    """Prior 4 % and 10 %, reading sd 2 ohm, truth 3 % and 8 % off.

    Expected values: the same linear Gaussian model solved in one piece (computed; batch equals sequential).
    """
    prior = worked()
    a, b = prior.ohm_per_turn * 1.03, prior.growth / 2 * 1.03 * 1.08
    noise = (1.2, -0.8, 2.1, -1.9, 0.4, -2.3, 1.5, 0.1)
    turns = range(500, 4001, 500)
    expected = {
        0: (5683.68, 232.39),
        1: (5873.85, 56.57),
        2: (5855.38, 44.88),
        4: (5856.25, 35.00),
        8: (5891.54, 12.22),
    }
    assert a * 8000 + b * 8000**2 == pytest.approx(5893.855, abs=1e-3)

    estimate, seen = begin(prior), {0: finish_at(begin(prior), 8000)}
    for i, (turn, error) in enumerate(zip(turns, noise, strict=True), start=1):
        reading = Reading(turn, a * turn + b * turn**2 + error, 20.0, sd_ohm=2.0, resting=True)
        estimate, used = update(estimate, reading)
        assert used
        seen[i] = finish_at(estimate, 8000)
    for i, (ohm, sd) in expected.items():
        assert seen[i].ohm == pytest.approx(ohm, abs=0.01)
        assert seen[i].sd == pytest.approx(sd, abs=0.01)
        assert seen[i].high - seen[i].low == pytest.approx(2 * 1.959964 * seen[i].sd)


PONTIUS_Y = (
    ".11019 .21956 .32949 .43899 .54803 .65694 .76562 .87487 .98292 1.09146 1.20001 1.30822 1.41599 1.52399 "
    "1.63194 1.73947 1.84646 1.95392 2.06128 2.16844 .11052 .22018 .32939 .43886 .54798 .65739 .76596 .87474 "
    ".98300 1.09150 1.20004 1.30818 1.41613 1.52408 1.63159 1.73965 1.84696 1.95445 2.06177 2.16829"
)


def taught(
    x: np.ndarray, y: np.ndarray, sd: float, per_turn_sd: float, growth_sd: float, leads_sd: float
) -> Estimate:
    """The estimator as a fit of y = leads + per_turn*x + growth*x*x/2, with priors too wide to matter."""
    flat = replace(
        certain(0.0, 0.0, turns=float(x[-1])),
        var_ohm_per_turn=per_turn_sd**2,
        var_growth=growth_sd**2,
        offset_sd=leads_sd,
    )
    estimate = begin(flat)
    for turn, ohm in zip(x, y, strict=True):
        estimate, used = update(estimate, Reading(float(turn), float(ohm), 20.0, sd_ohm=sd, resting=True))
        assert used
    return estimate


def at_origin(estimate: Estimate) -> tuple[float, float, float]:
    """Leads, ohm per turn and growth/2, taken back from the last turn to turn 0."""
    mean, n = estimate.belief.mean, estimate.turn
    assert mean[SHOWN] == pytest.approx(
        mean[PER_TURN] * n - mean[GROWTH] * n * n / 2
    )  # nothing was wound at 0
    return mean[LEADS], mean[PER_TURN] - mean[GROWTH] * n, mean[GROWTH] / 2


def test_nist_pontius() -> None:
    """NIST StRD, linear regression, Pontius (quadratic), to six digits, with the certified residual sd."""
    x = np.tile(np.arange(150_000, 3_000_001, 150_000), 2)
    y = np.array([float(v) for v in PONTIUS_Y.split()])
    order = np.argsort(x, kind="stable")
    estimate = taught(x[order], y[order], 0.205177424076185e-3, 1e-5, 1e-12, 1.0)
    b0, b1, b2 = at_origin(estimate)
    assert b0 == pytest.approx(0.673565789473684e-3, rel=1e-6)
    assert b1 == pytest.approx(0.732059160401003e-6, rel=1e-6)
    assert b2 == pytest.approx(-0.316081871345029e-14, rel=1e-6)


def test_gum_h3() -> None:
    """JCGM 100 (GUM), example H.3: a thermometer's correction as a line, and its value at 30 degrees C."""
    t = "21.521 22.012 22.512 23.003 23.507 23.999 24.513 25.002 25.503 26.010 26.511"
    b = "-.171 -.169 -.166 -.159 -.164 -.165 -.156 -.157 -.159 -.161 -.160"
    x = np.array([float(v) for v in t.split()]) - 20.0
    y = np.array([float(v) for v in b.split()])
    estimate = taught(x, y, 0.0034976, 1.0, 0.0, 10.0)
    intercept, slope, _ = at_origin(estimate)
    assert intercept == pytest.approx(-0.171204, abs=1e-6)
    assert slope == pytest.approx(0.00218270, abs=1e-8)
    cov, n = estimate.belief.cov, estimate.turn
    assert sqrt(cov[LEADS][LEADS]) == pytest.approx(0.0028776, abs=1e-6)
    assert sqrt(cov[PER_TURN][PER_TURN]) == pytest.approx(0.00066794, rel=2e-4)
    assert cov[LEADS][PER_TURN] / sqrt(cov[LEADS][LEADS] * cov[PER_TURN][PER_TURN]) == pytest.approx(
        -0.9304, abs=1e-4
    )
    ahead = 10.0 - n
    prediction = (
        estimate.belief.mean[LEADS] + estimate.belief.mean[SHOWN] + estimate.belief.mean[PER_TURN] * ahead
    )
    spread = np.array([1.0, ahead, 0, 1.0, 0, 0, 0])
    assert prediction == pytest.approx(-0.149377, abs=1e-6)
    assert sqrt(spread @ np.array(cov) @ spread) == pytest.approx(0.0041386, abs=1e-6)
