"""Each caution where it belongs, and only there."""

from __future__ import annotations

import re

import pytest

from tests.lay.recipes import WANDER, machine, recipe
from windctl.plan.make import make_plan
from windctl.profile.builtin import VIRTUAL
from windctl.profile.model import MachineProfile

TO_OHM = {
    "stop__turns": None,
    "stop__dcr_20c_ohm": "5600.0",
    "stop__min_turns": "7000",
    "stop__max_turns": "9000",
}


def test_an_ordinary_coil_on_a_full_machine_has_none() -> None:
    assert make_plan(recipe(), VIRTUAL).warnings == ()


@pytest.mark.parametrize(
    ("changes", "says"),
    [
        ({"bobbin__flange_depth_mm": "5.3"}, r"a tight fit: the long sides build up to 4\.9"),
        ({"bobbin__flange_depth_mm": "4.0"}, "it will not fit: .* flange is only 4 mm deep; about 6"),
        (
            {"tension__set_cn": "20.0"},
            r"20 cN is 29 % of the 69 cN that break this wire; .*14 cN \(our judgement",
        ),
        (
            {"tension__set_cn": "12.0", "tension__band_cn": "20.0"},
            r"lets the tension rise to 32 cN, 46 % of the 69 cN .*\(our judgement",
        ),
        ({"spindle__cruise_rpm": "1000"}, r"at 1000 rpm .* 2\.\d m/s and jerks to 3\.4 m/s twice a turn"),
        (
            {"spindle__ramp_rpm_per_s": "400"},
            r"400 rpm/s is more than the machine's 300 rpm/s, which it will",
        ),
    ],
)
def test_recipes_that_call_for_a_word(changes: dict[str, str], says: str) -> None:
    # Strength of annealed copper 200 to 250 MPa, from memory: 220 MPa on AWG 42 is 0.69 N.
    (said,) = make_plan(recipe(**changes), VIRTUAL).warnings
    assert re.search(says, said)


def test_a_dense_scatter() -> None:
    dense = recipe(WANDER, lay__turns_per_pass=None, lay__pitch_mm="0.07")
    assert any(
        w.startswith("a dense scatter: the mean pitch of 0.07 mm") for w in make_plan(dense, VIRTUAL).warnings
    )


def test_a_machine_that_only_counts() -> None:
    warnings = " | ".join(
        make_plan(recipe(tension__set_cn="10.0", tension__band_cn="3.0"), MachineProfile(format=1)).warnings
    )
    for part in (
        "cannot stop the machine",
        "guided by hand",
        "does not show until the resistance is read, and tension.band_cn is not watched",
    ):
        assert part in warnings


def test_no_tension_sensor_but_live_readings() -> None:
    (said,) = make_plan(recipe(), machine(readings__mode='"live"')).warnings
    assert said == "no tension sensor is fitted: a broken wire shows only in the reading"


def test_a_resistance_target_without_readings() -> None:
    blind = make_plan(recipe(**TO_OHM), machine(tension__sensor="true")).warnings
    assert any("nothing is read while winding" in said for said in blind)
    assert make_plan(recipe(**TO_OHM), VIRTUAL).warnings == ()


def test_a_round_bobbin_may_turn_fast() -> None:
    round_core = {
        "bobbin__core_length_mm": "30.0",
        "bobbin__core_width_mm": "30.0",
        "bobbin__corner_radius_mm": "15.0",
    }
    fast = {"spindle__cruise_rpm": "1400", "spindle__ramp_rpm_per_s": "300"}
    plan = make_plan(recipe(**round_core, **fast), VIRTUAL)
    assert plan.wire_speed_peak_full_m_s > 2.4
    assert plan.warnings == ()
