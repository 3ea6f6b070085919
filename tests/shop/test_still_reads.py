"""Readings of one coil against worlds that are drawn: the model's covariance is held to that of the draws.

The worlds are drawn from the physics alone (copper's temperature law, a meter with a gain, a thermometer with
a bias, a coil that cools), not from the module's sensitivities.
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from windctl.forecast.cooling import COOLING_REL, COOLING_S
from windctl.forecast.estimator import begin, update
from windctl.forecast.reading import Reading
from windctl.plan.prior import Prior
from windctl.record.events import CoilFinished
from windctl.record.state import State
from windctl.shop.cold_reading import THERMOMETER_STAYS, ColdReading, Meter, by_hand, by_record
from windctl.shop.life import life_of
from windctl.shop.still_reads import cold_value, covariance, hidden_by, still

ALPHA = 0.00393  # IEC 60028
METER = Meter("bench", "bench", 0.003, 0.001, 0.2, 0.5, 0.3, 0.5, 0.7, 0.7)
OTHER = replace(METER, name="handheld", gain_rel=0.005)
TRUE = 7900.0


def drawn(rng: np.random.Generator, when: list[tuple[str, float, float | None]], n: int) -> np.ndarray:
    """n worlds by row: what each reading is off by at 20 degrees C, ohm. `when`: meter, true air, minutes."""
    gains = {"bench": 0.003 * rng.normal(size=n), "handheld": 0.005 * rng.normal(size=n)}
    leads = {name: 0.5 + 0.3 * rng.normal(size=n) for name in gains}
    bias = 0.5 * math.sqrt(THERMOMETER_STAYS) * rng.normal(size=n)
    warmth = 0.7 + 0.7 * rng.normal(size=n)
    tau = COOLING_S / 60.0 * (1.0 + COOLING_REL * rng.normal(size=n))
    columns = []
    for name, air, minutes in when:
        left = np.zeros(n) if minutes is None else np.exp(-minutes / np.maximum(tau, 0.3))
        ohm = (1 + gains[name]) * (TRUE * (1 + ALPHA * (air - 20 + left * warmth)) + leads[name])
        ohm = ohm + 0.001 * TRUE * rng.normal(size=n) + 0.2 * rng.normal(size=n)
        celsius = air + bias + 0.5 * math.sqrt(1 - THERMOMETER_STAYS) * rng.normal(size=n)
        meter = METER if name == "bench" else OTHER
        columns.append([by_hand(meter, v, t, minutes).ohm - TRUE for v, t in zip(ohm, celsius, strict=True)])
    return np.array(columns).T


@pytest.mark.parametrize(
    "when",
    [
        [("bench", 21.0, None), ("bench", 26.0, None)],
        [("bench", 21.0, None), ("handheld", 19.0, None)],
        [("bench", 21.0, 0.0), ("bench", 21.0, 4.0), ("handheld", 24.0, None)],
    ],
)
def test_what_readings_share_is_what_drawn_worlds_share(when: list[tuple[str, float, float | None]]) -> None:
    """8 000 worlds: an entry of a sample covariance is known to sqrt(u11*u22 + u12^2)/sqrt(n)."""
    n = 8_000
    off = drawn(np.random.default_rng(7), when, n)
    readings = [
        by_hand(METER if name == "bench" else OTHER, TRUE * (1 + ALPHA * (air - 20)) + 0.5, air, minutes)
        for name, air, minutes in when
    ]
    stated = np.array(covariance(readings, TRUE))
    seen = np.cov(off.T)
    for i in range(len(when)):
        for j in range(len(when)):
            sampling = math.sqrt((stated[i, i] * stated[j, j] + stated[i, j] ** 2) / n)
            assert seen[i, j] == pytest.approx(stated[i, j], abs=4 * sampling + 0.03 * abs(stated[i, i]))
    # 95 % of all differences and of all best values lie within their half-widths
    between = still(readings[0], readings[-1])
    inside = np.mean(np.abs(off[:, -1] - off[:, 0]) < between.u95_ohm)
    assert inside == pytest.approx(0.95, abs=0.01)
    best = cold_value(readings)
    assert np.mean(np.abs(off @ best.weights) < best.u95) == pytest.approx(0.95, abs=0.01)


def test_one_meter_tells_what_two_cannot() -> None:
    """The difference of two readings by hand at one place: what is left of it, by hand. Scatter 0.1 % and 0.2
    ohm, and a quarter of the thermometer's variance, 0.25 K at 0.393 %, each twice."""
    before, after = by_hand(METER, 7900.5, 20.0, None), by_hand(METER, 7940.5, 20.0, None)
    said = still(before, after)
    each = math.hypot(0.001 * 7920, 0.2, ALPHA * 0.25 * 7920)
    assert said.u95_ohm == pytest.approx(1.96 * math.sqrt(2) * each, rel=1e-3)
    assert (said.statement, said.difference_ohm) == ("same", pytest.approx(40.0))
    assert {name for name, _ in hidden_by(said)} == {"gain of bench", "thermometer of bench"}
    strange = still(before, by_hand(OTHER, 7940.5, 20.0, None))
    assert strange.statement == "cannot be told"
    assert "gain of bench" not in {name for name, _ in hidden_by(strange)}
    assert still(before, by_hand(METER, 7700.5, 20.0, None)).statement == "changed"
    assert still(before, after, change_pct=0.5).statement == "changed"  # 0.51 +- 0.39 %


def test_a_gain_in_common_never_pulls_the_best_value_outside_its_readings() -> None:
    """Peelle's puzzle: 1.5 and 1.0, both +-10 % by themselves and +-20 % in common, combine to 0.88 where the
    common part is taken at each reading's own value (D'Agostini, NIM A 346, 1994, from memory)."""
    wild = replace(METER, gain_rel=0.2, noise_rel=0.1, floor_ohm=0.0, celsius_sd=0.0, lead_ohm=0.0)
    readings = [by_hand(wild, ohm, 20.0, None) for ohm in (1500.0, 1000.0)]
    assert 1000.0 < cold_value(readings).ohm < 1500.0


def test_the_budget_adds_up_and_follows_the_weights() -> None:
    readings = [
        replace(by_hand(meter, 7900.5 + n, 21.0, age), number=n + 1)
        for n, (meter, age) in enumerate([(METER, 1.0), (OTHER, None), (METER, None)])
    ]
    best = cold_value(readings)
    assert sum(best.weights) == pytest.approx(1.0)
    assert sum(line.ohm**2 for line in best.budget) == pytest.approx(best.sd**2, rel=1e-9)
    assert best.sd < min(reading.rel * reading.ohm for reading in readings)
    by_name = {line.name: line for line in best.budget}
    assert by_name["gain of handheld"].ohm == pytest.approx(0.005 * best.ohm * best.weights[1], rel=2e-3)
    assert set(by_name) >= {"scatter of reading 3", "warmth of the coil", "how fast it cools"}


def test_what_the_winding_said_shares_its_errors_with_a_reading_by_the_same_meter() -> None:
    """800 coils that grow in drawn worlds, read as they grow and once more by hand when cold: the covariance
    of both errors, and the spread of their difference, are as stated. Sampling: 1/sqrt(800), four sd."""
    rng = np.random.default_rng(11)
    prior = Prior(
        ohm_per_turn=0.66, growth=6e-5, var_ohm_per_turn=0.03**2, var_growth=(8e-6) ** 2, cov=0.0,
        growth_walk_rel=0.0, turns=8000.0, offset_ohm=0.5, offset_sd=0.3, gain_sd=0.003, celsius_sd=0.5,
        coil_over_air_k=0.7, coil_over_air_sd=0.7, noise_rel=0.001, floor_ohm=0.2, contact_length_ohm=0.0,
        wire_walk_rel=0.0, wire_slope_rel=0.0,
    )  # fmt: skip
    off_record, off_hand, record, hand = [], [], None, None
    for _ in range(800):
        per_turn, growth = 0.66 + 0.03 * rng.normal(), 6e-5 + 8e-6 * rng.normal()
        gain, bias, over = 0.003 * rng.normal(), 0.5 * rng.normal(), 0.7 + 0.7 * rng.normal()
        leads = 0.5 + 0.3 * rng.normal()
        estimate = begin(prior)
        for turn in range(500, 8001, 500):
            ohm = (per_turn * turn + growth * turn**2 / 2) * (1 + ALPHA * (1.0 + over))
            shown = (1 + gain) * (ohm + leads) + math.hypot(0.001 * ohm, 0.2) * rng.normal()
            estimate, _ = update(estimate, Reading(float(turn), shown, 21.0 + bias, resting=True))
        true = per_turn * 8000 + growth * 8000**2 / 2
        done = CoilFinished(0, "finished", "", 0, 8000.0, 0.0, 0.0, "not judged")
        record = by_record(State(estimate=estimate, finished=done), METER)
        assert record is not None
        shown = (1 + gain) * (true * (1 + ALPHA * 4.0) + leads) + 0.001 * true * rng.normal()
        hand = by_hand(METER, shown, 24.0 + bias, None)
        off_record.append(record.ohm / true - 1)
        off_hand.append(hand.ohm / true - 1)
    assert record is not None and hand is not None
    # the drawn thermometer is off by the same both times: a correlation of one, not of three quarters
    whole = [replace(s, sd=0.5) if "thermometer of" in s.name else s for s in record.sources]
    whole = [replace(s, sd=0.0) if s.name.startswith("place") else s for s in whole]
    ours = [replace(s, sd=0.5) if "thermometer of" in s.name else s for s in hand.sources]
    ours = [replace(s, sd=0.0) if s.name.startswith("place") else s for s in ours]
    pair = (replace(record, sources=tuple(whole)), replace(hand, sources=tuple(ours)))
    stated = np.array(covariance(pair, 1.0))
    seen = np.cov(np.array([off_record, off_hand]))
    for i, j in ((0, 0), (0, 1), (1, 1)):
        sampling = math.sqrt((stated[i, i] * stated[j, j] + stated[i, j] ** 2) / 800)
        assert seen[i, j] == pytest.approx(stated[i, j], abs=4 * sampling)
    left = stated[0, 0] + stated[1, 1] - 2 * stated[0, 1]
    assert np.var(np.subtract(off_hand, off_record)) == pytest.approx(left, rel=4 * math.sqrt(2 / 800))
    assert left < 0.6 * (stated[0, 0] + stated[1, 1])


def _cold(ohm: float, number: int, bare: bool = True) -> ColdReading:
    return replace(by_hand(METER, ohm + 0.5, 20.0, None, label=str(number)), number=number, bare=bare)


def test_a_change_begins_anew_and_a_slip_stays_alone() -> None:
    slipped = life_of([_cold(7900, 1), _cold(7090, 2), _cold(7903, 3)])
    assert [said and said.statement for said in slipped.stills] == [None, "changed", "same"]
    assert slipped.now is not None and not slipped.changed
    assert [reading.number for reading in slipped.now.readings] == [1, 3]
    shorted = life_of([_cold(7900, 1), _cold(7700, 2), _cold(7702, 3)])
    assert [said and said.statement for said in shorted.stills] == [None, "changed", "changed"]
    assert shorted.changed and shorted.made is not None and shorted.now is not None
    assert [reading.number for reading in shorted.made.readings] == [1]
    assert [reading.number for reading in shorted.now.readings] == [2, 3]


def test_a_reading_that_cannot_tell_goes_with_the_others() -> None:
    strange = replace(by_hand(OTHER, 7930.5, 20.0, None), number=2)
    lived = life_of([_cold(7900, 1), strange])
    assert [said and said.statement for said in lived.stills] == [None, "cannot be told"]
    assert lived.now is not None and [reading.number for reading in lived.now.readings] == [1, 2]


def test_an_assembled_coil_is_compared_with_itself_assembled() -> None:
    lived = life_of([_cold(7900, 1), _cold(7600, 2, bare=False), _cold(7605, 3, bare=False)])
    assert [said and said.before.number for said in lived.stills] == [None, 1, 2]
    assert lived.now is not None and [reading.number for reading in lived.now.readings] == [1]


def test_nothing_read_is_no_value() -> None:
    lived = life_of([])
    assert (lived.made, lived.now, lived.changed) == (None, None, False)
    with pytest.raises(ValueError, match="leads"):
        by_hand(METER, 0.4, 20.0, None)
    with pytest.raises(ValueError, match="temperature law"):
        by_hand(METER, 400.0, -200.0, None)
