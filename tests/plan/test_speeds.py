"""Paces in the board's integers, and how long a coil takes, against a spindle simulated step by step."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.lay.recipes import machine, recipe
from windctl.errors import PlanRefused
from windctl.plan.pace import PaceSpec, pace_for
from windctl.plan.speeds import duration_s, pace_spec, rate, steps_per_s
from windctl.recipe.tables import Spindle


def simulated_s(spindle: Spindle, accel: float, decel: float, turns: float) -> float:
    """A spindle that always goes as fast as it may and can still brake from, a millisecond at a time."""
    way, speed, seconds, dt = 0.0, 0.0, 0.0, 1e-3
    accel, decel = accel / 60, decel / 60
    finish = max(turns - spindle.finish_turns, min(float(spindle.start_turns), turns))
    while way < turns - 1e-6:
        left = turns - way
        most = (2 * decel * left) ** 0.5
        if way < spindle.start_turns:
            most = min(most, spindle.start_rpm / 60)
        else:
            most = min(most, spindle.cruise_rpm / 60)
        to_finish = finish - way
        slow = spindle.finish_rpm / 60
        most = min(most, slow if to_finish <= 0 else (slow**2 + 2 * decel * to_finish) ** 0.5)
        speed = max(min(speed + accel * dt, most), 1e-3)
        way += speed * dt
        seconds += dt
    return seconds


@pytest.mark.parametrize("turns", [5.0, 60.0, 90.0, 300.0, 1000.0])
def test_winding_time_is_that_of_a_simulated_spindle(turns: float) -> None:
    spindle = recipe().spindle
    expected = simulated_s(spindle, 200, 500, turns)
    assert duration_s(spindle, 200, 500, turns) == pytest.approx(expected, rel=0.01, abs=0.1)


def test_winding_time_of_a_plain_case() -> None:
    # 600 rpm throughout, 10 turns/s; 60 rpm/s and 120 rpm/s: 10 s and 5 s of ramps over 50 and 25 turns.
    plain = Spindle(
        start_rpm=600.0,
        start_turns=1,
        cruise_rpm=600.0,
        finish_rpm=600.0,
        finish_turns=1,
        ramp_rpm_per_s=60.0,
    )
    assert duration_s(plain, 60, 120, 1075) == pytest.approx(10 + 5 + 1000 / 10)


@given(st.floats(1, 100_000), st.floats(10, 2000), st.floats(10, 2000))
def test_more_turns_never_take_less_time(turns: float, accel: float, decel: float) -> None:
    spindle = recipe().spindle
    assert 0 < duration_s(spindle, accel, decel, turns) < duration_s(spindle, accel, decel, turns + 1)


def test_paces_are_whole_steps_a_second() -> None:
    spec = pace_spec(recipe(), machine())
    assert (spec.start_pace, spec.cruise_pace, spec.finish_pace) == (1333, 5333, 1000)
    assert spec.start_counts == 50 * 400
    # from 800 to 150 rpm at 500 rpm/s: (800^2 - 150^2) / (120 * 500) turns, and 0.35 s at 800 rpm
    slowing = (800**2 - 150**2) / (120 * 500) + 0.35 * 800 / 60
    assert spec.finish_counts == pytest.approx((30 + slowing) * 400, abs=1)


def test_without_a_drive_paces_are_counts_a_second() -> None:
    on = machine(spindle__drive='"none"', spindle__counts_per_turn="20", guide__kind='"hand"')
    assert pace_spec(recipe(), on).cruise_pace == round(800 / 60 * 20)


def test_the_slowest_pace_still_moves() -> None:
    assert steps_per_s(0.01, 1) == 1


@pytest.mark.parametrize(
    ("count", "stop", "pace"),
    [
        (0, None, 10),
        (99, 5000, 10),
        (100, None, 100),
        (100, 5000, 100),
        (4000, None, 100),
        (4799, 5000, 100),
        (4800, 5000, 20),
        (5000, 5000, 20),
        (6000, 5000, 20),
        (50, 200, 10),
    ],
)
def test_slow_first_turns_cruise_and_slow_last_turns(count: int, stop: int | None, pace: int) -> None:
    assert pace_for(PaceSpec(10, 100, 100, 20, 200), count, stop) == pace


def test_a_ramp_too_gentle_for_a_board_is_refused() -> None:
    assert rate(15, 400, "x") == 100
    with pytest.raises(
        PlanRefused, match=r"x of 10 rpm/s is 67 steps/s2 .* at least 100; 15 rpm/s is the least"
    ):
        rate(10, 400, "x")
