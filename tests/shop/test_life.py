"""Facts of measurements become readings by the meter that took them, also those of older versions."""

from __future__ import annotations

from dataclasses import replace

import pytest

from windctl.desk.measuring import Measurement, fact_of
from windctl.profile.model import MachineProfile
from windctl.record.addenda import CoilMeasured, decode, encode
from windctl.shop.cold_reading import meter_of
from windctl.shop.life import reading_of

WHEN = "2026-03-01T09:30:00+01:00"
BENCH = MachineProfile.model_validate(
    {"format": 1, "name": "old bench", "bench": "b1", "readings": {"lead_ohm": 1.5, "gain_sd_pct": 0.2}}
)


def test_an_older_fact_was_taken_with_the_meter_of_its_coil() -> None:
    """As it was stored before stages and meters were kept: the fields of then, in canonical form."""
    stored = (
        b'{"build_mm":null,"build_sd_mm":null,"by":"Demo Winder","celsius":22.0,"dcr_20c_ohm":7900.0,'
        b'"dcr_rel":0.001,"grams":null,"grams_sd":null,"ohm":7963.6,"wall_time":"2026-03-01T09:30:00+01:00"}'
    )
    fact = decode("coil_measured", stored)
    assert isinstance(fact, CoilMeasured)
    assert (fact.stage, fact.minutes, fact.meter, fact.gain_rel) == ("", None, "", None)
    reading = reading_of(fact, meter_of(BENCH))
    assert reading is not None
    assert reading.ohm == pytest.approx((7963.6 - 1.5) / (1 + 0.00393 * 2))
    assert (reading.meter, reading.label) == ("old bench (b1)", "by hand, 2026-03-01 09:30")
    assert len(fact.measured) == 1  # it teaches as it did


def test_a_fact_keeps_its_meter_whatever_becomes_of_the_profile() -> None:
    fact = fact_of(Measurement(ohm=7963.6, celsius=22.0, stage="potted"), BENCH, "Demo Winder", WHEN)
    again = decode("coil_measured", encode(fact))
    assert again == fact
    better = meter_of(BENCH.model_copy(update={"name": "new bench"}))
    assert isinstance(again, CoilMeasured)
    assert reading_of(again, better) == reading_of(fact, replace(better, gain_rel=0.5))
    reading = reading_of(again, better)
    assert reading is not None and reading.meter == "old bench (b1)"


def test_what_is_no_resistance_is_no_reading() -> None:
    fact = fact_of(Measurement(henry=2.3, resonance_hz=6200.0), BENCH, "Demo Winder", WHEN)
    assert reading_of(fact, meter_of(BENCH)) is None
    assert fact.measured == ()
