"""A plan that the readings contradict is given up for them, not averaged with them."""

from __future__ import annotations

import numpy as np
import pytest

from tests.forecast.truth import DEFAULT, TURNS, Instruments, Truth, draw, prior_for, with_bounce
from windctl.forecast.alarm import find_alarm
from windctl.forecast.estimator import Estimate, begin, update
from windctl.forecast.events import spliced
from windctl.forecast.finish import finish_at

MEASURED = Truth(wire_sd=0.005)  # a spool of which a piece was measured


def wound(
    seed: int, factor: float, meter: Instruments = DEFAULT, splice: bool = False
) -> tuple[float, Estimate]:
    """The true resistance of a coil whose wire has `factor` times what was measured on its spool, and what is
    made of its readings; the last ten of them at rest."""
    coil = draw(seed, Truth(wire_sd=0.005, gauge_factor=factor), meter)
    estimate = begin(prior_for(MEASURED, meter))
    readings = coil.readings(np.arange(8.0, TURNS, 40.0))
    readings += coil.readings(np.full(10, float(TURNS)), resting=True)
    for at, reading in enumerate(readings):
        if splice and at == 100:
            estimate = spliced(estimate, reading.turn)
        estimate, _ = update(estimate, reading)
    return float(coil.ohm[TURNS]), estimate


def held(factor: float, coils: int = 40, splice: bool = False) -> tuple[float, float]:
    """How often the finished coil's interval holds the truth, and the mean of its half-width over it."""
    hits, widths = 0, 0.0
    for seed in range(coils):
        true, estimate = wound(3_000 + seed, factor, splice=splice)
        finish = finish_at(estimate, TURNS)
        hits += finish.low <= true <= finish.high
        widths += (finish.high - true) / true / coils if finish.high > true else 0.0
    return hits / coils, widths


@pytest.mark.parametrize("factor", [0.90, 0.94, 1.06, 1.10, 1.26])
def test_a_spool_that_was_measured_wrong_leaves_the_interval_true(factor: float) -> None:
    """Of 40 intervals that hold 95 times in 100, fewer than 34 hold once in 100 000 (binomial)."""
    part, width = held(factor)
    assert part >= 34 / 40
    assert width < 0.02  # and what is known of the coil is still about as much as the meter is known


def test_it_is_told_all_the_same() -> None:
    for factor in (0.90, 1.10):
        _, estimate = wound(3_000, factor)
        found = find_alarm(estimate)
        assert found is not None
        assert found.kind == "wire"


def test_also_across_a_splice() -> None:
    part, _ = held(1.10, splice=True)
    assert part >= 34 / 40


def test_a_contact_that_bounces_changes_nothing_of_it() -> None:
    hits = 0
    for seed in range(40):
        true, estimate = wound(4_000 + seed, 1.10, with_bounce(DEFAULT))
        finish = finish_at(estimate, TURNS)
        hits += finish.low <= true <= finish.high
    assert hits >= 34


def test_a_plan_that_holds_is_kept() -> None:
    """What the spool's measured piece said stays in the answer: it is surer than the meter alone would be."""
    kept = 0
    for seed in range(40):
        _, estimate = wound(5_000 + seed, 1.0)
        finish = finish_at(estimate, TURNS)
        alone = 1.96 * np.hypot(0.003, 0.00393 * np.hypot(0.5, 0.7))
        kept += (finish.high - finish.low) / 2.0 / finish.ohm < 0.93 * alone
    assert kept >= 39
