"""What a coil's readings teach does not depend on what was believed before, nor on the instruments' common
errors."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from tests.forecast.truth import DEFAULT, FINE, TURNS, Instruments, Truth, draw, prior_for
from tests.plan.experience.lots import basis
from windctl.forecast.belief import first_belief
from windctl.forecast.estimator import Estimate, begin, update
from windctl.forecast.reading import Reading
from windctl.forecast.taught import open_minded, taught
from windctl.plan.experience.lesson import Resistance, Share
from windctl.plan.prior import Prior

PRIOR = prior_for(Truth(), DEFAULT)


def estimate(prior: Prior, readings: list[Reading]) -> Estimate:
    done = begin(open_minded(prior, basis()))
    for reading in readings:
        done, _ = update(done, reading)
    return done


def readings_of(seed: int, meter: Instruments) -> list[Reading]:
    coil = draw(seed, Truth(), meter)
    live = coil.readings(np.arange(100.0, TURNS + 1.0, 100.0))
    return [*live, *coil.readings(np.full(5, float(TURNS)), resting=True)]


def test_without_a_reading_nothing_is_taught() -> None:
    assert taught(begin(open_minded(PRIOR, basis())), TURNS) == ()


def test_what_was_believed_before_is_not_taught_again() -> None:
    readings = readings_of(4, DEFAULT)
    sure = replace(PRIOR, ohm_per_turn=0.9 * PRIOR.ohm_per_turn, var_ohm_per_turn=1e-12, meter_cov=-1e-6)
    assert taught(estimate(sure, readings), TURNS) == taught(estimate(PRIOR, readings), TURNS)


def test_readings_half_way_say_little_of_the_finished_coil() -> None:
    coil = draw(5, Truth(), DEFAULT)
    early = taught(estimate(PRIOR, coil.readings(np.array([400.0]), resting=True)), TURNS)
    late = taught(estimate(PRIOR, coil.readings(np.array([7600.0]), resting=True)), TURNS)
    sure = {len(seen): seen[0] for seen in (early, late) if seen}
    assert all(isinstance(each, Resistance) for each in sure.values())
    assert not early or early[0].rel > 5.0 * late[0].rel  # type: ignore[union-attr]  # resistances


@pytest.mark.parametrize("meter", [FINE, DEFAULT], ids=["fine", "usual"])
def test_resistance_and_share_with_honest_uncertainty(meter: Instruments) -> None:
    """Against the true growth of drawn coils: r(n)*n/R(n) - 1, the end's turn from a hundred turns around it,
    and the true resistance as this meter and thermometer show it."""
    prior, ohms, shares = prior_for(Truth(), meter), [], []
    for seed in range(700, 740):
        coil = draw(seed, Truth(), meter)
        ohm, share = taught(estimate(prior, readings_of(seed, meter)), TURNS)
        assert isinstance(ohm, Resistance)
        assert isinstance(share, Share)
        shown = coil.ohm[TURNS] * (1.0 + coil.gain) * (1.0 - 0.00393 * coil.bias)
        ohms.append((ohm.ohm / shown - 1.0) / ohm.rel)
        per_turn = (coil.ohm[TURNS + 50] - coil.ohm[TURNS - 50]) / 100.0
        shares.append((share.part - (per_turn * TURNS / coil.ohm[TURNS] - 1.0)) / share.sd)
    assert 0.6 < np.sqrt(np.mean(np.square(ohms))) < 1.35
    assert 0.3 < np.sqrt(np.mean(np.square(shares))) < 1.5


def test_a_meter_that_taught_the_wire_tells_nothing_of_itself() -> None:
    """Where the whole of what the instruments are off by is in the prior already, with the other sign, what
    they will show is foreseen more surely, and says nothing of their error."""
    bare = replace(PRIOR, coil_over_air_k=0.0)
    own = first_belief(replace(bare, gain_sd=0.0, celsius_sd=0.0, coil_over_air_sd=0.0)).cov[1][1]
    blind = first_belief(bare)
    error = (blind.cov[1][1] - own) / PRIOR.ohm_per_turn**2
    learnt = first_belief(replace(bare, meter_cov=-error))
    assert learnt.cov[1][1] == pytest.approx(own - error * PRIOR.ohm_per_turn**2, rel=1e-9)
    for row in (4, 5, 6):
        assert learnt.cov[1][row] == pytest.approx(0.0, abs=1e-18)
        assert learnt.cov[row][row] == blind.cov[row][row]
