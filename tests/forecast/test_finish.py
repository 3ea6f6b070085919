"""What an estimate says of any turn, and the turn that meets a resistance."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.forecast.priors import certain, shop, worked
from windctl.forecast.estimator import begin
from windctl.forecast.finish import finish_at, so_far, turn_for


def test_the_interval_is_95_per_cent_of_a_normal() -> None:
    finish = finish_at(begin(worked()), 8000)
    assert finish.ohm == pytest.approx(5683.68, abs=0.01)
    assert (finish.high - finish.ohm) / finish.sd == pytest.approx(1.95996, abs=1e-5)
    assert finish.ohm - finish.low == pytest.approx(finish.high - finish.ohm)


def test_nothing_wound_is_nothing_for_certain() -> None:
    start = so_far(begin(shop()), 0.0)
    assert (start.ohm, start.sd) == (0.0, 0.0)


@given(st.floats(1.0, 12_000.0))
def test_the_turn_for_the_resistance_of_a_turn_is_that_turn(turn: float) -> None:
    estimate = begin(worked())
    wanted = turn_for(estimate, finish_at(estimate, turn).ohm)
    assert wanted.turn == pytest.approx(turn, rel=1e-9)
    assert wanted.low < wanted.turn < wanted.high


def test_the_turns_spread_is_the_resistances_over_ohm_per_turn() -> None:
    estimate = begin(worked())
    wanted = turn_for(estimate, 5683.685)
    assert wanted.turn == pytest.approx(8000.0, abs=0.01)
    slope = (finish_at(estimate, 8001.0).ohm - finish_at(estimate, 7999.0).ohm) / 2
    assert wanted.sd == pytest.approx(232.39 / slope, rel=1e-4)


@given(st.floats(-1e-4, 1e-4), st.floats(1.0, 1e6))
def test_an_answer_comes_even_where_growth_is_absurd(growth: float, ohm: float) -> None:
    wanted = turn_for(begin(certain(0.65, growth)), ohm)
    assert 0.0 < wanted.turn < 1e8
