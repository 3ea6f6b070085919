"""The forecast against coils that are not its model: error, honesty of the interval, and the bound.

The truths (`tests/forecast/truth.py`) draw, walk and slope what the estimator thinks constant or Gaussian.
The long form takes 1000 coils a row, the short one enough coils and readings to notice a mistake.
"""

from __future__ import annotations

import numpy as np
import pytest

from tests.conftest import LONG
from tests.forecast.bound import bound, grown, least_without_readings
from tests.forecast.scoring import Score, follow
from tests.forecast.situations import EVERY, MEASURED, Situation, live, situations
from tests.forecast.truth import FINE, TURNS, Instruments, Truth, draw, prior_for, with_bounce
from windctl.forecast.estimator import begin, update
from windctl.forecast.finish import finish_at
from windctl.forecast.reading import Reading
from windctl.plan.prior import Prior

pytestmark = pytest.mark.timeout(3600 if LONG else 300)

FIRST_SEED = 80_000
OFTEN = EVERY if LONG else 50.0  # turns between live readings


def seeds(number: int) -> range:
    return range(FIRST_SEED, FIRST_SEED + number)


def at(part: float, truth: Truth, meter: Instruments, number: int, prior: Prior | None = None) -> Score:
    """Live readings up to this part of the coil."""
    return follow(seeds(number), truth, meter, live(part, OFTEN), [part * TURNS], prior=prior).stages[0]


@pytest.mark.parametrize("row", situations(OFTEN), ids=lambda row: row.name)
def test_error_and_interval(row: Situation, long_form: bool) -> None:
    """rms error within its limit; 95 % intervals that hold in 91 to 99 % and stay within 3 times the rms.

    In the short form the rms may be above by two standard errors of so few coils.
    """
    number = 1000 if long_form else 80
    seen = follow(seeds(number), row.truth, row.meter, row.turns, row.at, resting=row.resting, cold=row.cold)
    for (part, limit), score in zip(row.stages, seen.stages, strict=True):
        if limit is not None and (long_form or OFTEN == EVERY or not row.name.startswith("live")):
            assert score.rms <= limit * (1.0 if long_form else 1.3), (row.name, part)
        assert (0.91 if long_form else 0.87) <= score.held <= (0.99 if long_form else 1.0), (row.name, part)
        assert score.sharp <= 3.0, (row.name, part)


def test_no_forecast_without_readings_can_be_much_better(long_form: bool) -> None:
    """The best one number for all coils of a measured spool is off by 1.34 % rms, and ours by hardly more."""
    least, _ = least_without_readings(MEASURED)
    assert least == pytest.approx(0.01343, abs=0.0002)
    ours = follow(seeds(1000 if long_form else 200), MEASURED, FINE, np.array([]), [0.0]).stages[0]
    assert ours.rms <= least * (1.05 if long_form else 1.12)


@pytest.mark.parametrize("part", [0.25, 0.5])
def test_a_bouncing_contact_costs_next_to_nothing(part: float, long_form: bool) -> None:
    """2 % of the readings spoilt: rms within 1.15 of the clean one."""
    number = 1000 if long_form else 60
    clean = at(part, Truth(), FINE, number)
    spoilt = at(part, Truth(), with_bounce(FINE), number)
    assert spoilt.rms <= (1.15 if long_form else 1.25) * clean.rms
    assert spoilt.held >= 0.87


def test_good_readings_are_not_gated_out(long_form: bool) -> None:
    seen = follow(seeds(300 if long_form else 20), Truth(), FINE, live(1.0, OFTEN), [TURNS])
    assert seen.gated < 0.01 * seen.read


def test_a_bad_first_reading_never_starves(long_form: bool) -> None:
    """Whatever the first reading shows, half way the error is within 5 times the clean rms."""
    number = 2000 if long_form else 60
    turns = live(0.5, 20.0 if long_form else OFTEN)
    clean = follow(seeds(number), Truth(), FINE, turns, [0.5 * TURNS]).stages[0]
    prior, rng = prior_for(Truth(), FINE), np.random.default_rng(5)
    for seed in seeds(number):
        coil = draw(seed, Truth(), FINE)
        readings = coil.readings(turns)
        first = readings[0]
        factor = rng.choice([0.0, np.inf, 1.0 + rng.uniform(0.02, 0.3), 1.0 - rng.uniform(0.02, 0.4)])
        readings[0] = Reading(first.turn, float(first.ohm * factor), first.celsius)
        estimate = begin(prior)
        for reading in readings:
            estimate, _ = update(estimate, reading)
        error = finish_at(estimate, TURNS).ohm / float(coil.ohm[TURNS]) - 1.0
        assert abs(error) <= 5.0 * clean.rms, seed


@pytest.mark.parametrize("part", [0.25, 0.5, 0.75])
def test_near_the_bound_of_any_linear_estimator(part: float, long_form: bool) -> None:
    """rms over the posterior Cramer-Rao bound of a Gaussian truth with the drawn truths' moments.

    Worked out from other coils than the ones judged.
    """
    turns = np.arange(50.0, part * TURNS + 1.0, 50.0 if long_form else 100.0)
    least = bound(grown(Truth(), 2000 if long_form else 500), turns, FINE)
    found = follow(seeds(1000 if long_form else 80), Truth(), FINE, turns, [part * TURNS]).stages[0]
    assert 0.85 <= found.rms / least <= 1.35
