"""What one coil picks up, by its own record: count, what was foreseen of it, and what was measured."""

from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path

import pytest

from windctl.coil.geometry import core_of
from windctl.coil.turns_area import winding_of
from windctl.plan.experience.lesson import Build, Lesson, Resistance
from windctl.plan.make import make_plan
from windctl.profile.builtin import VIRTUAL
from windctl.recipe.load import load_recipe
from windctl.record.addenda import CoilMeasured, CoilNoted, CoilTaught
from windctl.shop.picks_up import picks_up, recorded

RECIPE = load_recipe(Path(__file__).parents[2] / "recipes/hum-pair-north.toml")
CORE = core_of(RECIPE.bobbin)
PLAN = make_plan(RECIPE, VIRTUAL)
BARE = Lesson("b1-2026-0001", "b1", "", PLAN.basis, 5000.0, 0.004, ())


def test_with_nothing_measured_it_is_what_was_foreseen() -> None:
    seen = picks_up(CORE, BARE, PLAN.prior)
    grown = (PLAN.mean_turn_mm - PLAN.perimeter_mm) / math.pi  # of the plan's own mean turn
    known = 5000 * winding_of(CORE, 0.0, grown, PLAN.crown).mean_area_mm2 * 1e-6
    assert seen.turns_area_m2 == pytest.approx(known, rel=1e-6)
    assert 0.03 < seen.rel < 0.12  # packing of a scatter that nobody has measured


def test_a_prior_that_has_learnt_of_a_denser_lay_encloses_less() -> None:
    learnt = replace(
        PLAN.prior,
        growth=0.9 * PLAN.prior.growth,
        var_growth=0.81 * (PLAN.prior.var_growth - 0.9 * 0.01 * PLAN.prior.growth**2 * 0.8),
        cov=0.9 * PLAN.prior.cov,
    )
    before, after = picks_up(CORE, BARE, PLAN.prior), picks_up(CORE, BARE, learnt)
    assert 0.92 < after.turns_area_m2 / before.turns_area_m2 < 0.96
    assert after.rel < before.rel


def test_a_caliper_makes_it_surer() -> None:
    plain = picks_up(CORE, BARE, PLAN.prior)
    measured = replace(BARE, measured=(Build(1.04 * 0.93 * PLAN.build_mm, 0.05),))
    seen = picks_up(CORE, measured, PLAN.prior)
    assert seen.rel < plain.rel
    assert seen.turns_area_m2 < plain.turns_area_m2


def test_one_microtesla_at_mains_frequency() -> None:
    """V = 2*pi*f*B*N*A."""
    seen = picks_up(CORE, BARE, PLAN.prior)
    assert seen.volt(50.0) == pytest.approx(2 * math.pi * 50.0 * 1e-6 * seen.turns_area_m2)
    told = seen.as_json()
    assert told["hum_v_per_ut_60hz"] / told["hum_v_per_ut_50hz"] == pytest.approx(1.2)
    assert told["turns_area_sd_m2"] == pytest.approx(seen.rel * seen.turns_area_m2)


def test_of_a_record_the_latest_lesson_and_what_hands_measured_count() -> None:
    ohm = Resistance(PLAN.dcr_20c_ohm, 0.002)
    early = CoilTaught("0", replace(BARE, turns=4000.0))
    late = CoilTaught("1", replace(BARE, measured=(ohm,)))
    by_hand = CoilMeasured("", "Demo Winder", build_mm=4.5, build_sd_mm=0.05)
    note = CoilNoted("", "Demo Winder", "nothing to do with it")
    seen = recorded(CORE, [early, note, late, by_hand], PLAN.prior)
    known = picks_up(CORE, replace(BARE, measured=(ohm, Build(4.5, 0.05))), PLAN.prior)
    assert seen == known


def test_a_record_that_says_too_little_says_nothing() -> None:
    assert recorded(CORE, [], PLAN.prior) is None
    assert recorded(None, [CoilTaught("1", BARE)], PLAN.prior) is None
    assert recorded(CORE, [CoilTaught("1", replace(BARE, turns=0.0))], PLAN.prior) is None
