"""What chance makes of a spec, over many seeds."""

from __future__ import annotations

import statistics

import pytest

from tests.machine.plant.worlds import BOBBIN
from windctl.machine.plant.fate import BENCH_LAWS, COIL_LAWS, SPOOL_LAWS, draw_fate, true_to

SEEDS = range(600)
FATES = [draw_fate(BOBBIN, seed) for seed in SEEDS]


def spread(name: str) -> list[float]:
    return [float(getattr(fate, name)) for fate in FATES]


def test_the_same_seed_draws_the_same_world() -> None:
    assert [draw_fate(BOBBIN, seed) for seed in SEEDS[:20]] == FATES[:20]
    assert len({fate.ohm_per_m for fate in FATES}) == len(FATES)


def test_ohm_per_metre_varies_by_the_wires_tolerance_and_never_leaves_it() -> None:
    """Fine wire lies within about 8 % of its table (a wire datasheet gives AWG 42 1534 to 1801 ohm per
    1000 ft); its sd of 4 % is cut at twice that, which leaves 0.88 of it."""
    relative = [ohm / BOBBIN.ohm_per_m - 1.0 for ohm in spread("ohm_per_m")]
    assert max(map(abs, relative)) <= 0.08
    assert statistics.pstdev(relative) == pytest.approx(0.0352, rel=0.1)
    assert statistics.fmean(relative) == pytest.approx(0.0, abs=0.005)


def test_overall_diameter_lies_anywhere_in_its_grade() -> None:
    """A grade's range counts as 4 sd; evenly drawn over all of it, the sd is range / sqrt(12)."""
    overall, grade_mm = spread("overall_mm"), 4.0 * BOBBIN.overall_sd_mm
    assert statistics.pstdev(overall) == pytest.approx(grade_mm / 12**0.5, rel=0.08)
    assert max(abs(mm - BOBBIN.overall_mm) for mm in overall) <= grade_mm / 2.0


def test_packing_scatters_about_its_class_and_stays_possible() -> None:
    packing = spread("packing")
    assert statistics.fmean(packing) == pytest.approx(0.63, abs=0.01)
    assert statistics.pstdev(packing) == pytest.approx(0.88 * 0.06, rel=0.1)
    assert max(packing) < 0.9069  # no plane packing of circles is denser: pi / (2 sqrt 3)


def test_instruments_err_by_what_the_profile_says_of_them() -> None:
    assert statistics.pstdev(spread("gain")) == pytest.approx(0.88 * 0.003, rel=0.1)
    assert statistics.pstdev(spread("thermometer_k")) == pytest.approx(0.88 * 0.5, rel=0.1)
    assert statistics.fmean(spread("offset_ohm")) == pytest.approx(0.5, abs=0.05)
    assert min(spread("offset_ohm")) >= 0.0


def test_a_coil_comes_off_warmer_than_the_air_never_colder_by_friction() -> None:
    warmth = spread("warmth_k")
    assert min(warmth) == 0.0
    assert 0.6 < statistics.fmean(warmth) < 0.9
    assert max(warmth) <= 0.7 + 2.0 * 0.7


def test_both_mains_frequencies_occur() -> None:
    near_60 = sum(abs(hz - 60.0) < 0.05 for hz in spread("mains_hz"))
    near_50 = sum(abs(hz - 50.0) < 0.05 for hz in spread("mains_hz"))
    assert near_50 + near_60 == len(FATES)
    assert 0.15 < near_60 / len(FATES) < 0.35


def test_a_spool_shared_by_two_benches_has_one_wire() -> None:
    here, there = draw_fate(BOBBIN, 1, spool_seed=9), draw_fate(BOBBIN, 2, spool_seed=9)
    assert (here.ohm_per_m, here.overall_mm, here.slope_per_km) == (
        there.ohm_per_m,
        there.overall_mm,
        there.slope_per_km,
    )
    assert here.gain != there.gain


def test_a_bench_keeps_its_instruments_from_coil_to_coil_but_not_the_lay() -> None:
    first, second = draw_fate(BOBBIN, 5), draw_fate(BOBBIN, 5, coil=1)
    assert (first.gain, first.room_c, first.ohm_per_m) == (second.gain, second.room_c, second.ohm_per_m)
    assert first.packing != second.packing


def test_quantities_do_not_move_together() -> None:
    """Streams of their own: no two quantities of the table are correlated over the seeds."""
    a, b = spread("ohm_per_m"), spread("packing")
    assert abs(statistics.correlation(a, b)) < 4.0 / len(a) ** 0.5
    assert abs(statistics.correlation(spread("gain"), spread("thermometer_k"))) < 4.0 / len(a) ** 0.5


def test_every_law_is_named_once() -> None:
    names = [law.name for law in SPOOL_LAWS + COIL_LAWS + BENCH_LAWS]
    assert len(names) == len(set(names))


def test_the_true_world_has_no_error() -> None:
    fate = true_to(BOBBIN)
    assert fate.ohm_per_m == BOBBIN.ohm_per_m
    assert fate.gain == 1.0
    assert fate.room_c == 20.0
    assert fate.bounces_per_s == fate.hum_field_ut == fate.tilt_degrees == 0.0
