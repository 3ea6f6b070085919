"""Speeds, jumps, travel and queue horizon against sums by hand."""

from __future__ import annotations

import numpy as np
import pytest

from tests.lay.recipes import WANDER, machine, recipe
from windctl.errors import PlanRefused
from windctl.lay.limits import braking_turns, check, jumps, measure
from windctl.lay.make import make_program
from windctl.lay.program import Program


def program(*pairs: tuple[int, int]) -> Program:
    counts, guide = zip(*pairs, strict=True)
    return Program(np.array(counts, dtype=np.uint16), np.array(guide, dtype=np.int16), 400, 200.0)


def test_guide_speed_is_pitch_times_turns_a_second() -> None:
    # 16 steps a turn at 200 steps/mm are 0.08 mm; at 600 rpm ten turns a second.
    assert measure(program((400, 16)), machine(), 600).guide_mm_per_s == pytest.approx(0.8)


@pytest.mark.parametrize(
    ("before", "after", "jump"),
    [
        (3.0, 4.5, 1.5),
        (-3.0, -1.0, 2.0),
        (0.0, 4.0, 4.0),
        (-4.0, 0.0, 4.0),
        (3.0, -4.0, 4.0),
        (0.0, 0.0, 0.0),
    ],
)
def test_a_turn_round_passes_through_standing(before: float, after: float, jump: float) -> None:
    assert jumps(np.array([before, after])).tolist() == [jump]


def test_braking_distance() -> None:
    # 600 rpm are 10 turns/s, 300 rpm/s are 5 turns/s2: 100 / (2 * 5).
    assert braking_turns(600, 300) == pytest.approx(10)


def test_an_ordinary_recipe_passes() -> None:
    for asked in (recipe(), recipe(WANDER)):
        profile = machine(guide__backlash_mm="0.05")
        found = check(make_program(asked, profile), asked, profile)
        assert found.rpm == 800
        assert found.travel_mm == pytest.approx(10.8 + 0.05, abs=0.01)
        assert found.horizon_turns > found.braking_turns


def test_taking_up_the_play_adds_at_most_a_quarter_of_the_jump() -> None:
    tight = {"guide__start_stop_mm_per_s": "2.0"}
    asked = recipe()
    plain = make_program(asked, machine(**tight))
    played = make_program(asked, machine(**tight, guide__backlash_mm="0.5"))
    extra = measure(played, machine(), 800).guide_mm_per_s - measure(plain, machine(), 800).guide_mm_per_s
    assert 0.4 < extra <= 2.0 / 4 + 0.02


@pytest.mark.parametrize(
    ("profile", "changes", "says"),
    [
        ({"spindle__max_rpm": "700"}, {}, r"800 rpm, and .*max_rpm is 700 rpm; lower spindle\.cruise_rpm"),
        (
            {"guide__max_mm_per_s": "1.0", "guide__start_stop_mm_per_s": "1.0"},
            {},
            r"up to 1\.07 mm/s, and guide\.max_mm_per_s is 1 mm/s; at most 750 rpm, .* at most 0\.075 mm",
        ),
        (
            {"guide__start_stop_mm_per_s": "0.5"},
            {},
            r"changes its speed by 1\.07 mm/s, and guide\.start_stop_mm_per_s is 0\.5 mm/s; at most 375 rpm",
        ),
        ({"guide__travel_mm": "10.0"}, {}, r"travels 10\.8 mm.*travel_mm is 10 mm; raise lay\.margin_mm"),
        (
            {"board__queue_segments": "20"},
            {"lay__style": '"scatter"', "lay__pattern": '"wander"', "lay__amount": "0.2", "lay__seed": "1"},
            r"needs 14 turns to stop, .* reach only 7 turns ahead; .*board\.queue_segments",
        ),
    ],
)
def test_what_the_machine_cannot_do_is_refused_with_what_would_do(
    profile: dict[str, str], changes: dict[str, str], says: str
) -> None:
    asked, on = recipe(**changes), machine(**profile)
    with pytest.raises(PlanRefused, match=says):
        check(make_program(asked, on), asked, on)


def test_everything_is_said_at_once() -> None:
    asked, on = recipe(), machine(guide__travel_mm="5.0", spindle__max_rpm="500")
    with pytest.raises(PlanRefused) as refused:
        check(make_program(asked, on), asked, on)
    assert len(str(refused.value).splitlines()) == 2


def test_the_pace_that_is_said_to_do_does() -> None:
    on = machine(guide__start_stop_mm_per_s="0.5")
    asked = recipe(spindle__cruise_rpm="375")
    check(make_program(asked, on), asked, on)
