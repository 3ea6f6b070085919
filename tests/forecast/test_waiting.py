"""Whether to let a coil cool: when, what it reads then, and what that gains."""

from __future__ import annotations

from dataclasses import replace

import pytest

from tests.forecast.priors import shop
from windctl.forecast.estimator import Estimate, begin, update
from windctl.forecast.finish import finish_at
from windctl.forecast.reading import Reading
from windctl.forecast.waiting import waiting

TURN = 8000.0


def read(over_air_k: float = 0.7, seconds: float = 500.0) -> Estimate:
    """After a settled reading of a coil that is so much warmer than the 22 degrees beside it."""
    estimate = begin(shop())
    ohm = finish_at(estimate, TURN).ohm * (1 + 0.00393 * (2.0 + over_air_k)) + 0.5 + 0.82
    return update(estimate, Reading(TURN, ohm, 22.0, resting=True, seconds=seconds))[0]


def test_three_time_constants_take_the_warmth_away() -> None:
    """Newton's law of cooling: a twentieth is left after ln 20 = 3.0 of the time constant, 180 s (common
    practice, no source)."""
    wait = waiting(read(), TURN, 22.0)
    assert wait is not None
    assert wait.minutes == 9
    assert wait.then_u95 < 0.9 * wait.now_u95


def test_it_says_what_the_cold_coil_reads() -> None:
    """0.393 % a degree (IEC 60028), so much less as it is now warmer than the air; no wire to a contact."""
    estimate = read()
    wait = waiting(estimate, TURN, 22.0)
    assert wait is not None
    cold = finish_at(estimate, TURN).ohm * (1 + 0.00393 * 2.0) + 0.5
    assert wait.ohm == pytest.approx(cold * (1 + 0.05 * 0.00393 * 0.7), rel=2e-5)


def test_the_gain_is_what_the_cold_reading_brings() -> None:
    estimate = read()
    wait = waiting(estimate, TURN, 22.0)
    assert wait is not None
    again = Reading(TURN, wait.ohm + 0.82, 22.0, resting=True, seconds=500.0 + 60.0 * wait.minutes)
    after, used = update(estimate, again)
    assert used
    finish = finish_at(after, TURN)
    assert (finish.high - finish.low) / 2.0 == pytest.approx(wait.then_u95, rel=0.03)


def test_a_cool_coil_is_not_waited_for() -> None:
    estimate = read()
    assert waiting(begin(shop()), TURN, 22.0) is None  # never read
    assert waiting(replace(estimate, share=0.04), TURN, 22.0) is None
    half = waiting(replace(estimate, share=0.5), TURN, 22.0)
    assert half is not None
    assert half.minutes == 7
