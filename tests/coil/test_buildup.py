"""Length and resistance from turns, against sums turn by turn and the worked racetrack."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.coil.buildup import BuildUp, build_per_turn_mm, resistance_ohm

RACETRACK = 2 * 50 + 2 * math.pi * 3  # straight 50 mm, end radius 3 mm


def test_the_worked_racetrack() -> None:
    """Straight 50, end radius 3, window 11, 8000 turns, build 3.5 mm in all, 5.4716 ohm/m: 1038.761 m,
    5683.685 ohm. Computed beforehand, by formula and turn by turn."""
    coil = BuildUp(RACETRACK, 3.5 / 8000)
    assert coil.wire_length_m(8000) == pytest.approx(1038.761, abs=5e-4)
    assert resistance_ohm(coil.wire_length_m(8000), 5.4716) == pytest.approx(5683.685, abs=5e-3)
    turn_by_turn = sum(RACETRACK + 2 * math.pi * 3.5 * (i + 0.5) / 8000 for i in range(8000)) / 1000
    assert coil.wire_length_m(8000) == pytest.approx(turn_by_turn, rel=1e-12)


def test_build_of_a_turn_from_packing() -> None:
    # Overall 0.072 mm at packing 0.846027 in an 11 mm gap gives the 3.5 mm of the worked case (computed).
    assert 8000 * build_per_turn_mm(0.072, 0.846027, 11) == pytest.approx(3.5, rel=1e-5)


@pytest.mark.parametrize("crown", [1.0, 6 / 5, 4 / 3])
def test_general_form_of_the_worked_racetrack(crown: float) -> None:
    # 950.797 m + 87.965 m * crown (computed).
    coil = BuildUp(RACETRACK, build_per_turn_mm(0.072, 0.846027, 11), crown)
    assert coil.wire_length_m(8000) == pytest.approx(950.797 + 87.965 * crown, abs=2e-3)


def test_crown_is_what_laying_turn_by_turn_on_a_sloping_lay_gives() -> None:
    """Turns put one by one where a triangular density asks for them, each as long as the build there
    makes it."""
    gap, turns, c, bins = 11.0, 20_000, 2e-4, 400
    x = (np.arange(bins) + 0.5) / bins * gap
    density = 2 * (1 - x / gap) / gap  # a ramp: h * integral f^2 = 4/3, as for a triangle
    order = np.random.default_rng(3).permutation(turns)
    place = np.searchsorted(np.cumsum(density) * gap / bins, (order + 0.5) / turns).clip(0, bins - 1)
    height = np.zeros(bins)
    length = 0.0
    for bin_ in place:
        length += RACETRACK + 2 * math.pi * (height[bin_] + c * bins / 2)
        height[bin_] += c * bins
    assert BuildUp(RACETRACK, c, 4 / 3).wire_length_m(turns) == pytest.approx(length / 1000, rel=2e-4)


@given(st.floats(20, 400), st.floats(1e-6, 1e-2), st.floats(1, 2), st.floats(1, 200_000))
def test_turns_for_a_length_is_the_inverse(perimeter: float, c: float, crown: float, turns: float) -> None:
    coil = BuildUp(perimeter, c, crown)
    assert coil.turns_for_length(coil.wire_length_m(turns)) == pytest.approx(turns, rel=1e-9)


@given(st.floats(20, 400), st.floats(1e-6, 1e-2), st.floats(1, 2), st.floats(10, 100_000))
def test_the_next_turn_is_the_derivative(perimeter: float, c: float, crown: float, turns: float) -> None:
    coil = BuildUp(perimeter, c, crown)
    one_turn = coil.wire_length_m(turns + 0.5) - coil.wire_length_m(turns - 0.5)
    assert coil.metres_per_turn(turns) == pytest.approx(one_turn, rel=1e-6)
    assert coil.mean_turn_mm(turns) == pytest.approx(coil.wire_length_m(turns) / turns * 1000)
