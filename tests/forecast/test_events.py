"""Splices, new wire and corrected counts widen what they must and leave the rest."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from tests.forecast.priors import shop
from windctl.forecast.alarm import alarm
from windctl.forecast.estimator import Estimate, begin, update
from windctl.forecast.events import new_wire, recounted, spliced
from windctl.forecast.finish import finish_at, so_far
from windctl.forecast.reading import Reading


def shown(turn: float, wire: float = 1.0, changed_at: float = 0.0, wire_then: float = 1.0) -> Reading:
    """The worked coil on wire of `wire` times its ohm per metre, `wire_then` times from `changed_at` on."""
    prior = shop()

    def plain(n: float) -> float:
        return prior.ohm_per_turn * n + prior.growth * n**2 / 2

    at = min(turn, changed_at) if changed_at else turn
    ohm = wire * plain(at) + wire_then * (plain(turn) - plain(at))
    return Reading(turn, ohm * (1.0 + 0.00393 * 0.7) + 1.32, 20.0, resting=True)


def known(wire: float, until: float = 4000.0) -> Estimate:
    estimate = begin(shop())
    for turn in np.arange(100.0, until + 1.0, 100.0):
        estimate, used = update(estimate, shown(float(turn), wire))
        assert used
    return estimate


def test_a_splice_costs_a_turn_and_a_little_of_the_wire() -> None:
    before = known(1.03)
    after = spliced(before, 4000.0)
    assert finish_at(after, 8000).ohm == pytest.approx(finish_at(before, 8000).ohm)
    extra = finish_at(after, 8000).sd ** 2 - finish_at(before, 8000).sd ** 2
    rest = finish_at(before, 8000).ohm - so_far(before, 4000).ohm
    slope = after.belief.mean[1]
    assert extra == pytest.approx(slope**2 + (0.002 * rest) ** 2, rel=0.03)


def test_new_wire_forgets_the_old_wire_and_keeps_the_coil() -> None:
    """Known to be 6 % off, the old wire says nothing of the new one, whose own 4 % come back."""
    after = new_wire(known(1.06), 4000.0)
    plain = shop()
    rest = plain.ohm_per_turn * 4000 + plain.growth * (8000**2 - 4000**2) / 2
    expected = so_far(after, 4000.0).ohm + rest
    finish = finish_at(after, 8000)
    assert finish.ohm == pytest.approx(expected, rel=0.006)
    assert 0.035 * rest < finish.sd < 0.06 * rest


@pytest.mark.parametrize("wire_then", [0.95, 1.0, 1.07])
def test_readings_after_new_wire_are_followed_at_once(wire_then: float) -> None:
    estimate = new_wire(known(1.04), 4000.0)
    for turn in np.arange(4050.0, 6001.0, 50.0):
        estimate, used = update(estimate, shown(float(turn), 1.04, 4000.0, wire_then))
        assert used
    assert alarm(estimate) is None
    truth = shown(8000.0, 1.04, 4000.0, wire_then).ohm - 1.32
    finish = finish_at(estimate, 8000)
    assert finish.low < truth / (1.0 + 0.00393 * 0.7) < finish.high
    assert finish.ohm == pytest.approx(truth / (1.0 + 0.00393 * 0.7), rel=3e-3)


def test_a_corrected_count_moves_the_turn_and_keeps_the_resistance() -> None:
    before = known(1.0)
    after = recounted(before, 4000.0, 4030.0, 5.0)
    assert after.turn == 4030.0
    assert so_far(after, 4030.0).ohm == pytest.approx(so_far(before, 4000.0).ohm)
    slope = before.belief.mean[1]
    assert so_far(after, 4030.0).sd ** 2 - so_far(before, 4000.0).sd ** 2 == pytest.approx(
        (5 * slope) ** 2, rel=0.02
    )


def test_an_event_before_any_reading_is_as_good_as_a_start() -> None:
    after = spliced(begin(shop()), 10.0)
    after, used = update(after, shown(500.0, 1.05))
    assert used
    assert replace(after, prior=shop()).used == 1
