"""Plans against the worked racetrack and against independent reckoning."""

from __future__ import annotations

import json
import math

import numpy as np
import pytest

from tests.lay.recipes import WANDER, machine, recipe
from windctl.errors import PlanRefused, UsageError
from windctl.plan.make import make_plan
from windctl.plan.model import Plan
from windctl.profile.builtin import VIRTUAL
from windctl.profile.model import MachineProfile

WORKED = {"lay__packing": "0.846027"}
TO_OHM = {"stop__turns": None, "stop__min_turns": "7000", "stop__max_turns": "9000"}
PROMISED = {
    "format", "recipe", "turns", "turns_sd", "dcr_20c_ohm", "dcr_sd_ohm", "wire_length_m", "wire_mass_g",
    "mean_turn_mm", "build_mm", "peak_build_mm", "crown", "fits", "duration_s", "wire_speed_mean_m_s",
    "wire_speed_peak_m_s", "program", "warnings",
}  # fmt: skip


def test_the_worked_racetrack() -> None:
    """Core 56 x 6 mm, corners 3 mm, gap 11 mm, overall 0.072 mm, packing 0.846027, 8000 turns even at 5.4716
    ohm/m: 950.797 m + 87.965 m * crown (computed beforehand)."""
    plan = make_plan(recipe(**WORKED), VIRTUAL)
    assert plan.wire_length_m == pytest.approx(950.797 + 87.965 * plan.crown, rel=1e-5)
    assert plan.dcr_20c_ohm == pytest.approx(5.4716 * plan.wire_length_m, rel=1e-12)
    assert plan.build_mm == pytest.approx(3.5, rel=1e-5)
    assert plan.mean_turn_mm == pytest.approx(plan.wire_length_m / 8)
    assert plan.perimeter_mm == pytest.approx(100 + 6 * math.pi)


def test_a_flat_lay_is_the_worked_case_itself() -> None:
    # 1038.761 m, 5683.685 ohm with a flat build of 3.5 mm (computed beforehand); here the wire trails
    # its guide.
    plan = make_plan(recipe(**WORKED, lay__margin_mm="0.0"), machine(guide__distance_mm="1"))
    assert plan.crown == pytest.approx(1, abs=0.012)
    assert plan.dcr_20c_ohm == pytest.approx(5683.685, rel=1e-3)


def test_the_crown_of_a_lay_short_of_the_flanges() -> None:
    # 11 mm gap, 0.3 mm short at each side, uniform: 1.0577 (computed).
    plan = make_plan(recipe(lay__margin_mm="0.3"), machine(guide__distance_mm="1"))
    assert plan.crown == pytest.approx(1.0577, rel=5e-3)


def test_the_json_form_has_every_promised_key_and_nothing_that_is_no_json() -> None:
    for asked in (recipe(), recipe(WANDER), recipe(**TO_OHM, stop__dcr_20c_ohm="5600.0")):
        form = json.loads(json.dumps(make_plan(asked, VIRTUAL).as_json(), allow_nan=False))
        assert set(form) >= PROMISED
        assert form["format"] == 1
        assert form["recipe"] == {"name": asked.name, "digest": asked.digest}
        assert len(form["program"]["digest"]) == 64


def test_a_measured_perimeter_wins() -> None:
    assert make_plan(recipe(bobbin__core_perimeter_mm="120.5"), VIRTUAL).perimeter_mm == pytest.approx(120.5)


@pytest.mark.parametrize("ohm", [5300.0, 5700.0, 6100.0])
def test_turns_for_a_resistance(ohm: float) -> None:
    plan = make_plan(recipe(**TO_OHM, stop__dcr_20c_ohm=str(ohm)), VIRTUAL)
    one_turn = plan.ohm_per_m * plan.mean_turn_mm / 1000
    assert abs(plan.dcr_20c_ohm - ohm) < one_turn
    assert plan.program.turns == 9000
    same = make_plan(recipe(), VIRTUAL, turns=plan.turns)
    assert same.dcr_20c_ohm == pytest.approx(plan.dcr_20c_ohm, rel=1e-4)
    more = make_plan(recipe(), VIRTUAL, turns=plan.turns + 100).dcr_20c_ohm - same.dcr_20c_ohm
    assert plan.turns_sd == pytest.approx(plan.dcr_sd_ohm / (more / 100), rel=0.02)


def test_asking_for_a_resistance_of_a_recipe_by_turns() -> None:
    plan = make_plan(recipe(), VIRTUAL, dcr_ohm=3000.0)
    assert plan.dcr_20c_ohm == pytest.approx(3000, abs=1)
    assert (plan.target_kind, plan.target_value) == ("dcr_20c_ohm", 3000.0)
    assert plan.program.turns >= plan.turns + 2.9 * plan.turns_sd


def test_the_build_is_that_of_the_planned_turns_not_of_the_whole_program() -> None:
    plan = make_plan(recipe(), VIRTUAL, dcr_ohm=40.0)  # some 61 turns, not half way across the gap
    longer = make_plan(recipe(stop__max_turns="8000"), VIRTUAL, dcr_ohm=40.0)
    assert longer.program.turns == 8000
    assert longer.crown == pytest.approx(plan.crown, rel=1e-3)
    assert max(longer.build_profile_mm[40:]) == 0


def test_asking_for_turns() -> None:
    plan = make_plan(recipe(**TO_OHM, stop__dcr_20c_ohm="5600.0"), VIRTUAL, turns=123)
    assert (plan.turns, plan.program.turns, plan.turns_sd, plan.target_kind) == (123, 123, 0, "turns")


@pytest.mark.parametrize(
    "asked", [{"turns": 5, "dcr_ohm": 5.0}, {"turns": 0}, {"dcr_ohm": 0.0}, {"dcr_ohm": math.nan}]
)
def test_an_impossible_target_is_a_usage_error(asked: dict[str, float]) -> None:
    with pytest.raises(UsageError):
        make_plan(recipe(), VIRTUAL, **asked)  # type: ignore[arg-type]  # wrong on purpose


def test_a_resistance_beyond_any_coil_is_refused() -> None:
    with pytest.raises(PlanRefused, match="at most 1000000 turns"):
        make_plan(recipe(), VIRTUAL, dcr_ohm=1e10)


def test_a_target_beyond_the_recipe_s_limits_stops_at_them_and_says_so() -> None:
    plan = make_plan(recipe(**TO_OHM, stop__dcr_20c_ohm="9000.0"), VIRTUAL)
    assert plan.turns == 9000
    assert any("beyond the recipe's limits of 7000 to 9000; it stops at 9000" in w for w in plan.warnings)


def test_the_program_never_depends_on_the_forecast() -> None:
    a = make_plan(recipe(**TO_OHM, stop__dcr_20c_ohm="5600.0"), VIRTUAL)
    b = make_plan(recipe(**TO_OHM, stop__dcr_20c_ohm="5650.0", wire__ohm_per_m_20c="5.3"), VIRTUAL)
    assert a.turns != b.turns
    assert a.program.digest == b.program.digest


def sampled(plan: Plan, n: int = 40_000) -> np.ndarray:
    """Resistances of coils drawn from the beliefs behind a plan: wire, core, build and crown apart."""
    rng = np.random.default_rng(7)
    rho = 5.4716 * (1 + math.hypot(0.04, 0.002) * rng.normal(size=n))
    core = plan.perimeter_mm * (1 + 0.005 * rng.normal(size=n))
    crown = 0.01 + 0.6 * (plan.crown - 1) / plan.crown
    build = math.hypot(2 * 0.001 / 0.072, 0.05 / 0.846027, crown)
    added = math.pi * plan.build_mm * plan.crown * (1 + build * rng.normal(size=n))
    return rho * (core + added) * plan.turns / 1000


def test_the_resistance_s_uncertainty_is_that_of_coils_drawn_from_the_beliefs() -> None:
    plan = make_plan(recipe(**WORKED), VIRTUAL)
    assert plan.dcr_sd_ohm == pytest.approx(sampled(plan).std(), rel=0.02)


def test_the_prior_says_the_same_as_the_plan() -> None:
    plan = make_plan(recipe(**WORKED), VIRTUAL)
    prior, n = plan.prior, plan.turns
    assert prior.ohm_per_turn * n + prior.growth * n**2 / 2 == pytest.approx(plan.dcr_20c_ohm)
    spread = np.array(
        [[prior.var_ohm_per_turn, prior.cov], [prior.cov, prior.var_growth]],
    )
    how = np.array([n, n**2 / 2])
    assert math.sqrt(how @ spread @ how) == pytest.approx(plan.dcr_sd_ohm)
    assert np.linalg.eigvalsh(spread / np.sqrt(np.outer(spread.diagonal(), spread.diagonal()))).min() > 0
    # ohm per metre is common to both: what they share is its variance, and a little that it wanders to the
    # coil's middle
    assert prior.cov / (prior.ohm_per_turn * prior.growth) == pytest.approx(0.04**2 + 0.002**2, rel=2e-3)


def test_the_prior_allows_for_another_spool_unless_the_recipe_knows_better() -> None:
    """From spool to spool ohm per metre differs by several per cent, whatever one spool measured."""
    prior = make_plan(recipe(), VIRTUAL).prior
    assert math.sqrt(prior.var_ohm_per_turn) / prior.ohm_per_turn > 0.04
    known = make_plan(recipe(wire__ohm_per_m_sd="0.02"), VIRTUAL).prior
    assert math.sqrt(known.var_ohm_per_turn) / known.ohm_per_turn == pytest.approx(
        math.hypot(0.02 / 5.4716, 0.002, 0.005), rel=0.03
    )


def test_the_prior_carries_the_meter_from_the_profile() -> None:
    on = machine(
        readings__lead_ohm="0.8",
        readings__lead_sd_ohm="0.1",
        readings__gain_sd_pct="0.2",
        readings__noise_pct="0.4",
        readings__floor_ohm="0.05",
        readings__celsius_sd="0.9",
        readings__coil_over_air_k="1.5",
        readings__coil_over_air_sd_k="0.6",
        readings__contact_length_mm="200",
    )
    prior = make_plan(recipe(), on).prior
    assert (prior.offset_ohm, prior.offset_sd, prior.floor_ohm) == (0.8, 0.1, 0.05)
    assert (prior.gain_sd, prior.noise_rel) == pytest.approx((0.002, 0.004))
    assert (prior.celsius_sd, prior.coil_over_air_k, prior.coil_over_air_sd) == (0.9, 1.5, 0.6)
    assert prior.contact_length_ohm == pytest.approx(5.4716 * 0.2)
    assert prior.turns == 8000


def test_packing_from_the_recipe_else_from_the_style() -> None:
    # Scatter 0.63 +- 0.06, even 0.74 +- 0.05: common practice, no source.
    for asked, packing in (
        (recipe(), (0.74, 0.05)),
        (recipe(WANDER), (0.63, 0.06)),
        (recipe(lay__packing="0.7", lay__packing_sd="0.01"), (0.7, 0.01)),
    ):
        plan = make_plan(asked, VIRTUAL)
        assert (plan.packing, plan.packing_sd) == packing
    assert make_plan(recipe(), VIRTUAL).build_mm < make_plan(recipe(WANDER), VIRTUAL).build_mm


def test_a_machine_that_only_counts_gets_the_same_coil() -> None:
    """The lay of the recipe decides the build, whoever guides it."""
    by_motor, by_hand = (
        make_plan(recipe(WANDER), VIRTUAL),
        make_plan(recipe(WANDER), MachineProfile(format=1)),
    )
    assert by_hand.dcr_20c_ohm == pytest.approx(by_motor.dcr_20c_ohm, rel=2e-3)
    assert by_hand.crown == pytest.approx(by_motor.crown, abs=0.02)
    assert not by_hand.program.guide.any()
    assert by_hand.program.counts_per_turn == 1
    assert by_hand.program.turns == 8000


def test_faster_than_the_machine_is_refused() -> None:
    with pytest.raises(PlanRefused, match=r"800 rpm, and the machine's spindle\.max_rpm is 600 rpm"):
        make_plan(recipe(), machine(spindle__max_rpm="600"))


def test_the_profile_for_drawing_adds_up_to_the_build() -> None:
    plan = make_plan(recipe(WANDER), VIRTUAL)
    assert sum(plan.build_profile_mm) / len(plan.build_profile_mm) == pytest.approx(plan.build_mm)
    assert plan.build_mm < plan.peak_build_mm < plan.side_build_mm
