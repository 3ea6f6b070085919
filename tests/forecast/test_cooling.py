"""A coil that stands cools, a coil that turns warms again, and a cold reading says more than a warm one."""

from __future__ import annotations

from dataclasses import replace
from math import exp, sqrt

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.forecast.priors import shop
from windctl.forecast.cooling import share_left
from windctl.forecast.estimator import Estimate, begin, update
from windctl.forecast.finish import so_far
from windctl.forecast.reading import Reading

OVER = 1.6  # K, this coil over the air while it turns; the profile says 0.7 +- 0.7
TIME_CONSTANT = 150.0  # s, of this coil


def test_warmth_halves_and_comes_back_in_its_time() -> None:
    assert share_left(1.0, 180.0, True) == pytest.approx(exp(-1))
    assert share_left(0.0, 180.0, False) == pytest.approx(1 - exp(-1))
    assert share_left(1.0, 1e6, False) == 1.0


@given(st.floats(0, 1), st.floats(0, 500), st.floats(0, 500), st.booleans())
def test_warmth_does_not_mind_how_time_is_cut(share: float, one: float, other: float, standing: bool) -> None:
    parts = share_left(share_left(share, one, standing), other, standing)
    assert parts == pytest.approx(share_left(share, one + other, standing), abs=1e-12)
    assert 0.0 <= parts <= 1.0


def shown(turn: float, seconds: float, over: float, *, resting: bool, timed: bool = True) -> Reading:
    prior = shop()
    true = prior.ohm_per_turn * turn + prior.growth * turn**2 / 2
    raw = true * (1.0 + 0.00393 * (2.0 + over)) + 1.32
    return Reading(turn, raw, 22.0, resting=resting, seconds=seconds if timed else None)


def wound(timed: bool = True) -> Estimate:
    estimate = begin(replace(shop(), gain_sd=0.0, celsius_sd=0.0))
    for turn in np.arange(50.0, 8001.0, 50.0):
        reading = shown(float(turn), float(turn) / 15.0, OVER, resting=False, timed=timed)
        estimate, used = update(estimate, reading)
        assert used
    return estimate


def rested(minutes: int, timed: bool = True) -> Estimate:
    """Wound, then read every ten seconds while it cools."""
    estimate = wound(timed)
    for waited in np.arange(2.0, 60.0 * minutes + 1.0, 10.0):
        over = OVER * exp(-waited / TIME_CONSTANT)
        reading = shown(8000.0, 8000.0 / 15.0 + float(waited), over, resting=True, timed=timed)
        estimate, used = update(estimate, reading)
        assert used
    return estimate


def test_waiting_tells_how_warm_the_coil_was() -> None:
    """Ten minutes on, the coil's own warmth no longer clouds the answer."""
    prior = shop()
    true = prior.ohm_per_turn * 8000 + prior.growth * 8000**2 / 2
    warm, cold = so_far(wound(), 8000.0), so_far(rested(10), 8000.0)
    assert abs(warm.ohm - true) > 2.0 * abs(cold.ohm - true)  # 0.9 K warmer than the profile says
    assert cold.sd < 0.4 * warm.sd
    assert cold.low < true < cold.high
    assert warm.low < true < warm.high


def test_without_times_a_coil_is_taken_to_be_as_warm_as_it_was() -> None:
    estimate = rested(10, timed=False)
    assert estimate.share == 1.0
    assert so_far(estimate, 8000.0).sd > 0.8 * sqrt(0.5) * 0.00393 * 0.7 * 5700


def test_a_long_hold_in_mid_coil_neither_starves_nor_misleads() -> None:
    """Stood for a quarter of an hour at turn 4000, cooled, wound on and warmed again."""
    estimate, seconds, over = begin(shop()), 0.0, OVER
    verdicts = []
    for turn in [*np.arange(50.0, 4001.0, 50.0), *[4000.0] * 90, *np.arange(4050.0, 8001.0, 50.0)]:
        standing = turn == estimate.turn
        step = 10.0 if standing else 50.0 / 15.0
        seconds += step
        fading = exp(-step / TIME_CONSTANT)
        over = over * fading if standing else OVER - (OVER - over) * fading
        estimate, used = update(estimate, shown(float(turn), seconds, over, resting=standing))
        verdicts.append(used)
    assert all(verdicts)
    true = shop().ohm_per_turn * 8000 + shop().growth * 8000**2 / 2
    finish = so_far(estimate, 8000.0)
    assert finish.low < true < finish.high
    assert estimate.jump is None
