"""Where to check, what it gains, and whether it is worth it."""

from __future__ import annotations

from dataclasses import replace

import pytest

from tests.forecast.priors import shop
from tests.forecast.truth import DEFAULT, TURNS, Truth, draw, prior_for
from windctl.forecast.checking import check_at, where_to_check, worth_checking
from windctl.forecast.estimator import begin, update
from windctl.forecast.finish import finish_at, turn_for
from windctl.forecast.reading import Reading

FREE = (1.0, 20_000.0)  # turns allowed


def test_the_first_stop_lies_short_of_the_target_by_what_a_reading_will_tell() -> None:
    """Of wire that is unsure by 4 % some 7 % short, of wire known to 0.3 % hardly at all."""
    unsure = begin(shop())
    target = finish_at(unsure, 8000.0).ohm
    check = where_to_check(unsure, 0.0, target, *FREE)
    assert 0.90 * 8000 < check.turn < 0.95 * 8000
    known = replace(shop(), var_ohm_per_turn=1e-9, var_growth=1e-14, cov=0.0)
    assert where_to_check(begin(known), 0.0, target, *FREE).turn > 0.99 * 8000
    assert where_to_check(unsure, 0.0, target, 1.0, 7000.0).turn == 7000  # never beyond what is allowed


def test_what_a_check_gains_is_what_it_gains() -> None:
    """Foreseen before, against the interval after the reading was taken, whatever it showed."""
    for seed in (3, 4, 5):
        coil = draw(seed, Truth(), DEFAULT)
        estimate = begin(prior_for(Truth(), DEFAULT))
        foreseen = check_at(estimate, 7400.0, TURNS)
        (reading,) = coil.readings([7400.0], resting=True)  # type: ignore[arg-type]  # any sequence of turns
        after, used = update(estimate, reading)
        assert used
        assert finish_at(estimate, TURNS).sd == pytest.approx(foreseen.without_ohm)
        assert finish_at(after, TURNS).sd == pytest.approx(foreseen.with_ohm, rel=0.1)
        assert foreseen.with_ohm < 0.2 * foreseen.without_ohm


def test_the_later_the_check_the_more_it_gains() -> None:
    estimate = begin(shop())
    gained = [check_at(estimate, part * 8000.0, 8000.0).with_ohm for part in (0.25, 0.5, 0.75, 0.95)]
    assert gained == sorted(gained, reverse=True)


def test_a_second_check_is_worth_its_wound_only_where_it_may_change_something() -> None:
    estimate = begin(shop())
    target = finish_at(estimate, 8000.0).ohm
    assert worth_checking(estimate, 7400.0, target, 2.0)
    ohm = finish_at(estimate, 7400.0).ohm * (1 + 0.00393 * 0.7) + 1.3
    after, _ = update(estimate, Reading(7400.0, ohm, 20.0, resting=True))
    assert not worth_checking(after, turn_for(after, target).turn, target, 2.0)
    assert worth_checking(after, turn_for(after, target).turn, target, 0.01)
