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
        ({"bobbin__flange_depth_mm": "5.3"}, r"a tight fit: the long sides build up to 5\.0"),
        ({"bobbin__flange_depth_mm": "4.0"}, "it will not fit: .* flange is only 4 mm deep; about 6"),
        (
            {"tension__set_cn": "20.0"},
            r"20 cN is 29 % of the 69 cN that break this wire; .*14 cN \(our judgement",
        ),
        (
            {"tension__set_cn": "12.0", "tension__band_cn": "20.0"},
            r"lets the tension rise to 32 cN, 46 % of the 69 cN .*\(our judgement",
        ),
        (
            {"spindle__cruise_rpm": "1250"},
            r"at 1250 rpm .* 3\.\d m/s and jerks to 4\.2 m/s twice a turn; for wire of 0\.063 mm we advise "
            r"at most 4\.0 m/s \(our judgement\), a spindle\.cruise_rpm of 1190$",
        ),
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


def test_thinner_wire_is_wound_more_slowly_and_what_is_advised_is_heard_no_more() -> None:
    """Half the diameter, half the speed: our judgement, and the text says so."""
    fine = {"wire__gauge": '"AWG 44"', "wire__overall_mm": "0.058", "wire__ohm_per_m_20c": None}
    (said,) = make_plan(recipe(**fine, spindle__cruise_rpm="1000"), VIRTUAL).warnings
    match = re.search(
        r"for wire of 0\.050 mm we advise at most 3\.2 m/s .* spindle\.cruise_rpm of (\d+)$", said
    )
    assert match is not None
    assert make_plan(recipe(**fine, spindle__cruise_rpm=match[1]), VIRTUAL).warnings == ()


REGULAR = WANDER | {"lay.amount": "0.0", "lay.turns_per_pass": None}
RIBBONS = "ribbons: the guide's way there and back takes"


@pytest.mark.parametrize(
    ("changes", "says"),
    [
        # 10.8 mm between the turn-rounds: 108 turns there and back at 0.2 mm, 2 * 47.25 = 189/2
        (
            {"lay__pitch_mm": "0.2"},
            f"{RIBBONS} 108 turns: every time the wire comes to lie on its own path, and piles up there; "
            "lay.pitch_mm of 0.1999 mm spreads it, and so does more of lay.amount",
        ),
        (
            {"lay__turns_per_pass": "47.25"},
            f"{RIBBONS} 94.5 turns, nearly 189/2: every 2 times the wire comes to lie on its own path, and "
            "piles up there; lay.turns_per_pass of 47.24 spreads it, and so does more of lay.amount",
        ),
        ({"lay__turns_per_pass": "46.0625"}, f"{RIBBONS} 92.13 turns, nearly 737/8: every 8 times"),
        (
            {"lay__style": '"even"', "lay__pattern": None, "lay__amount": None, "lay__seed": None}
            | {"lay__turns_per_pass": "60"},
            f"{RIBBONS} 120 turns: every time the wire comes to lie on its own path, and piles up there; "
            "lay.turns_per_pass of 59.97 spreads it",
        ),
    ],
)
def test_a_lay_that_comes_back_to_its_own_path(changes: dict[str, str | None], says: str) -> None:
    (said,) = make_plan(recipe(REGULAR, **changes), VIRTUAL).warnings
    assert said.startswith(says)


@pytest.mark.parametrize("turns", [30.0, 36.5, 40.25, 44.1, 47.0, 51.3125])
@pytest.mark.parametrize("key", ["lay__pitch_mm", "lay__turns_per_pass"])
def test_what_is_offered_against_ribbons_is_near_and_does_away_with_them(key: str, turns: float) -> None:
    value = turns if key == "lay__turns_per_pass" else round(10.8 / turns, 6)
    (said,) = make_plan(recipe(REGULAR, **{key: str(value)}), VIRTUAL).warnings
    match = re.search(r"(\S+)(?: mm)? spreads it", said)
    assert match is not None
    assert float(match[1]) == pytest.approx(value, rel=0.01)
    assert make_plan(recipe(REGULAR, **{key: match[1]}), VIRTUAL).warnings == ()


@pytest.mark.parametrize("pattern", ["wander", "stagger", "ripple"])
def test_a_scatter_that_scatters_makes_no_ribbons(pattern: str) -> None:
    changes = {"lay__pattern": f'"{pattern}"', "lay__amount": "0.3", "lay__turns_per_pass": "47"}
    assert make_plan(recipe(REGULAR, **changes), VIRTUAL).warnings == ()


def test_turns_side_by_side_make_no_ribbons_whatever_their_number() -> None:
    even = recipe(lay__pitch_mm=None, lay__turns_per_pass="135")
    assert make_plan(even, VIRTUAL).warnings == ()


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
