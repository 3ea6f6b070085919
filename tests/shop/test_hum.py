"""Hum picked up and hum left, against published levels, a statistics library and textbook fields."""

from __future__ import annotations

import math

import numpy as np
import pytest
from scipy import stats

from tests.coil.polygons import area_of, outline
from windctl.coil.geometry import Core
from windctl.shop.hum import (
    FLOOR_DB,
    Mismatch,
    Seat,
    folded,
    hum_volt,
    level_db,
    mismatch_of,
    near_source,
)

SEAT = Seat(Core(26.5, 0.0, 2.5), 5.0, 6.5)


@pytest.mark.parametrize(("percent", "level"), [(0.1, -66.0), (1.0, -46.1), (5.0, -32.3)])
def test_the_table_of_what_is_left(percent: float, level: float) -> None:
    """20*log10(m/(2 + m)), relative to both in phase: computed from the formula, uniform field, no steel."""
    m = percent / 100
    assert round(level_db(m / (2 + m)), 1) == level
    assert mismatch_of(math.log(1 + m), 0.0).left.db == pytest.approx(level, abs=0.05)
    assert mismatch_of(-math.log(1 + m), 0.0).left.db == pytest.approx(level, abs=0.05)


def test_five_square_metres_in_a_microtesla_at_50_hz_pick_up_about_1_6_mv() -> None:
    """Computed from Faraday's law, and by turning the flux through polygons into a voltage step by step."""
    assert hum_volt(5.0, 50.0) == pytest.approx(1.6e-3, rel=0.02)
    turn_m2 = area_of(outline(26.5, 0.0, 2.5, 2.5)) * 1e-6
    t = np.linspace(0.0, 0.02, 4001)
    flux = 5000 * turn_m2 * 1e-6 * np.sin(2 * math.pi * 50 * t)
    volt = -np.gradient(flux, t)
    assert np.abs(volt).max() == pytest.approx(hum_volt(5000 * turn_m2, 50.0), rel=1e-4)
    assert hum_volt(1.0, 60.0) / hum_volt(1.0, 50.0) == pytest.approx(1.2)


@pytest.mark.parametrize(("mean", "sd"), [(0.0, 1.0), (0.5, 1.0), (-3.0, 0.7), (0.01, 0.2), (0.3, 1e-6)])
def test_quantiles_of_an_absolute_value_are_the_folded_normals(mean: float, sd: float) -> None:
    """scipy.stats.foldnorm, an independent implementation."""
    known = stats.foldnorm(abs(mean) / sd, scale=sd)
    assert folded(mean, sd) == pytest.approx(known.ppf([0.025, 0.975]), rel=1e-6, abs=1e-9)


def test_the_expected_square_is_the_mean_square() -> None:
    rng = np.random.default_rng([5, 1])
    drawn = 0.004 + 0.007 * rng.standard_normal(200_000)
    left = Mismatch(0.004, 0.007).left
    assert left.db == pytest.approx(10 * math.log10(np.mean(drawn**2)), abs=0.05)
    levels = 20 * np.log10(np.abs(drawn))
    assert np.mean((levels > left.low_db) & (levels < left.high_db)) == pytest.approx(0.95, abs=0.003)


def test_a_known_mismatch_has_no_spread_and_none_at_all_is_the_floor() -> None:
    left = Mismatch(0.01, 0.0).left
    assert left.low_db == left.high_db == left.db == pytest.approx(-40.0)
    assert Mismatch(0.0, 0.0).left.db == FLOOR_DB


def test_two_alike_coils_side_by_side_leave_what_the_fields_slope_says() -> None:
    """A dipole that stands in the coils' plane, its axis parallel to theirs: B goes with 1/r^3, so coils d
    apart in its direction differ by 3*d/r of the mean, and half of that is left of the sum. Places off the
    plane are worse, by not more than the field's greatest relative slope, which is 4.5*d/r over all places.

    B and its slope are worked out here from the dipole's textbook field by differences.
    """
    d = 0.022
    left = near_source(SEAT, SEAT, 22.0, False, Mismatch(0.0, 0.0))
    assert level_db(3 * d / 2) <= left.db <= level_db(4.5 * d / 2)

    def seen(at: np.ndarray) -> np.ndarray:
        """Flux per area of a unit dipole along each axis at `at`, through a small loop in the middle."""
        r = np.linalg.norm(at)
        return 3 * at[2] * at / r**5 - np.array([0.0, 0.0, 1.0]) / r**3

    worst = 0.0
    step = np.array([0.0, d / 2, 0.0])
    for up in np.linspace(-1, 1, 101):
        for turn in np.linspace(0, 2 * math.pi, 101):
            flat = math.sqrt(1 - up**2)
            at = np.array([flat * math.cos(turn), flat * math.sin(turn), up])
            apart, together = seen(at - step) - seen(at + step), seen(at - step) + seen(at + step)
            worst = max(worst, float(apart @ apart / (together @ together)))
    assert left.db == pytest.approx(10 * math.log10(worst), abs=0.1)


def test_coils_nearer_to_each_other_leave_less_and_stacked_ones_see_more_alike_still() -> None:
    none = Mismatch(0.0, 0.0)
    wide = near_source(SEAT, SEAT, 40.0, False, none).db
    close = near_source(SEAT, SEAT, 20.0, False, none).db
    assert wide - close == pytest.approx(20 * math.log10(2), abs=0.1)
    assert near_source(SEAT, SEAT, 1e-6, False, none).db < -150


def test_from_one_place_a_mismatch_comes_on_top() -> None:
    """With coils in one place the near source leaves what the uniform field does."""
    known = Mismatch(0.01, 0.002)
    assert near_source(SEAT, SEAT, 1e-6, False, known).db == pytest.approx(known.left.db, abs=0.01)
    apart = near_source(SEAT, SEAT, 22.0, False, known)
    alone = near_source(SEAT, SEAT, 22.0, False, Mismatch(0.0, 0.0))
    assert alone.db < apart.db < 20 * math.log10(10 ** (alone.db / 20) + 10 ** (known.left.high_db / 20))
    assert apart.low_db <= apart.db <= apart.high_db
