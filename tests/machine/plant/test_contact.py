"""The contact, sample by sample: what averaging takes away, and what it does not."""

from __future__ import annotations

import statistics
from dataclasses import replace

import pytest

from tests.machine.plant.worlds import BOBBIN, HAND_GUIDED, RPM_1000, wind, wind_turns
from windctl.machine.plant.contact import BLOCK, Meter
from windctl.machine.plant.fate import Fate, draw_fate, true_to
from windctl.machine.plant.plant import Plant
from windctl.machine.plant.spec import LAST_UNIT, OPEN, PlantSpec, scale_for

TRUE = true_to(HAND_GUIDED)
OHM = HAND_GUIDED.milliohm_per_unit / 1000.0


def at_turns(turns: int, fate: Fate, spec: PlantSpec = HAND_GUIDED) -> Plant:
    """A plant that has wound so many turns and stands."""
    plant = Plant(spec, 11, fate=fate)
    wind_turns(plant, turns)
    wind(plant, BLOCK, rate=0)
    return plant


def ohms(plant: Plant, ticks: int, rate: int = 0) -> list[float]:
    return [seen.contact * OHM for seen in wind(plant, ticks, rate)]


def test_a_true_meter_shows_coil_leads_and_the_wire_to_the_contact() -> None:
    plant = at_turns(1000, TRUE)
    seen = ohms(plant, 10)
    wire_to_contact = 0.150 * HAND_GUIDED.ohm_per_m
    expected = plant.truth().true_dcr_20c_ohm + HAND_GUIDED.lead_ohm + wire_to_contact
    assert seen == pytest.approx([expected] * 10, abs=OHM)


def test_resistance_moves_with_the_coils_temperature() -> None:
    """R(T) = R20 (1 + 0.00393 (T - 20)), IEC 60028."""
    cold, warm = at_turns(1000, TRUE), at_turns(1000, replace(TRUE, room_c=30.0))
    assert statistics.fmean(ohms(warm, 10)) == pytest.approx(
        statistics.fmean(ohms(cold, 10)) * 1.0393, rel=5e-4
    )


def test_a_coil_wound_fast_is_warmer_than_the_air_and_cools_in_minutes() -> None:
    fate = replace(TRUE, warmth_k=1.4, warmth_time_s=20.0)  # a small coil, as if hours were minutes
    plant = at_turns(1200, fate)
    fresh = statistics.fmean(ohms(plant, 100))
    wind(plant, 90_000, rate=0)
    rested = statistics.fmean(ohms(plant, 100))
    assert fresh / rested - 1.0 == pytest.approx(1.4 * 0.00393, rel=0.15)


@pytest.mark.parametrize("hz", [50.0, 60.0])
def test_hum_is_large_in_a_sample_and_gone_from_a_mean_over_100_ms(hz: float) -> None:
    """Whole cycles of either mains frequency fit into 100 ms. 5 m2 of turns in 1 uT at 50 Hz pick up about
    1.6 mV (Faraday); at 0.1 mA that is 16 ohm."""
    plant = at_turns(2000, replace(TRUE, hum_field_ut=1.0, mains_hz=hz))
    seen = ohms(plant, 1000)
    area_m2 = 2000 * HAND_GUIDED.core_area_mm2 * 1e-6
    expected = 16.0 * area_m2 / 5.0 * hz / 50.0
    assert max(seen) - statistics.fmean(seen) == pytest.approx(expected, rel=0.1)
    means = [statistics.fmean(seen[i : i + 100]) for i in range(0, 1000, 100)]
    assert max(means) - min(means) < 0.05 * expected + OHM / 10


def test_a_window_that_is_no_multiple_of_the_mains_keeps_hum() -> None:
    plant = at_turns(2000, replace(TRUE, hum_field_ut=1.0))
    seen = ohms(plant, 1000)
    means = [statistics.fmean(seen[i : i + 13]) for i in range(0, 988, 13)]
    assert max(means) - min(means) > 1.0


def test_a_wobbling_axis_shows_once_per_turn_and_cancels_over_whole_turns() -> None:
    """5 m2 of turns one degree askew in 50 uT at 1000 rpm give about 0.4 mV (Faraday), 4 ohm at 0.1 mA."""
    still = at_turns(2000, TRUE)
    askew = at_turns(2000, replace(TRUE, tilt_degrees=1.0))
    # 400 steps per turn and 20 ticks of 1/3 turn: 60 ticks make a whole turn at 400 steps in 60 ms
    plain, waved = ohms(still, 600, RPM_1000), ohms(askew, 600, RPM_1000)
    swing = [b - a for a, b in zip(plain, waved, strict=True)]
    area_m2 = 2000 * HAND_GUIDED.core_area_mm2 * 1e-6
    assert max(swing) == pytest.approx(4.6 * area_m2 / 5.0, rel=0.25)
    means = [statistics.fmean(swing[i : i + 60]) for i in range(0, 600, 60)]
    assert max(map(abs, means)) < 0.15


def test_a_standing_coil_generates_nothing() -> None:
    plant = at_turns(2000, replace(TRUE, tilt_degrees=1.0))
    wind(plant, 123, RPM_1000)
    standing = ohms(plant, 3)
    expected = plant.truth().true_dcr_20c_ohm + HAND_GUIDED.lead_ohm + 0.150 * HAND_GUIDED.ohm_per_m
    assert standing == pytest.approx([expected] * 3, abs=OHM)


def test_gain_and_offset_shift_a_reading_and_stay() -> None:
    plant = at_turns(1000, replace(TRUE, gain=1.004, offset_ohm=1.1))
    truth = plant.truth().true_dcr_20c_ohm
    expected = 1.004 * (truth + 1.1 + 0.150 * HAND_GUIDED.ohm_per_m)
    assert ohms(plant, 5) == pytest.approx([expected] * 5, abs=OHM)


def test_a_reading_scatters_by_about_what_the_profile_says() -> None:
    """Over many benches, the scatter of 200 ms means about the truth is the stated one within a factor."""
    ratios = []
    for seed in range(12):
        drawn = draw_fate(HAND_GUIDED, seed)
        fate = replace(TRUE, reading_noise=drawn.reading_noise, sample_noise=drawn.sample_noise)
        plant = at_turns(500, fate)
        means = [statistics.fmean(ohms(plant, 200)) for _ in range(40)]
        stated = ((0.001 * means[0]) ** 2 + 0.2**2) ** 0.5
        ratios.append(statistics.stdev(means) / stated)
    assert 0.5 < statistics.fmean(ratios) < 1.2
    assert max(ratios) < 1.8


def test_about_two_per_cent_of_the_readings_of_a_turning_coil_are_spoilt() -> None:
    """Readings of 200 ms, four a second; every kind of bad contact occurs."""
    bad, readings, opened, zeroed, high, low = 0, 0, 0, 0, 0, 0
    for seed in range(30):
        quiet = replace(draw_fate(HAND_GUIDED, seed), hum_field_ut=0.0, reading_noise=0.0, sample_noise=0.0)
        meter = Meter(HAND_GUIDED, quiet, seed)
        for _ in range(400):
            deviations = meter.block(4000.0, 5000.0, turning=True)[:200]
            readings += 1
            bad += any(deviations)
            opened += max(deviations) > LAST_UNIT
            zeroed += min(deviations) < -LAST_UNIT
            high += 0 < max(deviations) < LAST_UNIT
            low += -LAST_UNIT < min(deviations) < 0
    assert 0.01 < bad / readings < 0.05
    assert min(opened, zeroed, high, low) > 0.1 * bad


def test_a_standing_contact_does_not_bounce() -> None:
    quiet = replace(TRUE, bounces_per_s=50.0)
    meter = Meter(HAND_GUIDED, quiet, 1)
    assert not any(any(meter.block(4000.0, 5000.0, turning=False)) for _ in range(50))


def test_a_broken_wire_is_open() -> None:
    plant = at_turns(100, TRUE)
    plant.break_wire()
    assert {seen.contact for seen in wind(plant, 300, RPM_1000)} == {OPEN}


def test_without_a_contact_there_is_no_reading() -> None:
    assert {
        seen.contact for seen in wind(at_turns(10, TRUE, replace(HAND_GUIDED, readings="none")), 500)
    } == {OPEN}


def test_a_check_reads_only_with_drives_off_and_the_spindle_at_rest() -> None:
    plant = at_turns(500, TRUE, replace(HAND_GUIDED, readings="checks"))
    assert {seen.contact for seen in wind(plant, 600, RPM_1000)} == {OPEN}
    assert {seen.contact for seen in wind(plant, 600, rate=0)} == {OPEN}
    touched = wind(plant, 3 * BLOCK, rate=0, powered=0)[-1].contact
    expected = plant.truth().true_dcr_20c_ohm + HAND_GUIDED.lead_ohm + 0.150 * HAND_GUIDED.ohm_per_m
    assert touched * OHM == pytest.approx(expected, abs=OHM)


def test_a_larger_coil_gets_a_coarser_scale_and_stays_on_it() -> None:
    assert scale_for(15_000.0) == 305
    scale = scale_for(40_000.0)
    assert 40_000.0 < scale * LAST_UNIT / 1000.0 < 40_100.0
    assert BOBBIN.milliohm_per_unit * LAST_UNIT / 1000.0 == pytest.approx(20_000.0, rel=1e-3)
