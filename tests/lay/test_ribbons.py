"""Ribbons, found on programs, against where the wire of every pass lies."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from windctl.lay.fixed import SUB
from windctl.lay.make import hand_program, program_of
from windctl.lay.program import Program
from windctl.lay.ribbons import MOST_Q, is_clear, near_shift, nearest_clear, outward_starts, ribbon
from windctl.lay.spec import LaySpec

STROKE = 2160
TURNS = 8000


def regular(double: float, turns: int = TURNS, **more: int) -> Program:
    """A regular lay of so many turns per double traverse."""
    return program_of(LaySpec("even", turns, 400, STROKE, round(2 * STROKE * SUB / double), **more), 200.0)


def gathered(program: Program, q: int) -> float:
    """How much the outward passes, each at its angle, gather in q bundles: 1 all in bundles, 0 spread (the
    q-th trigonometric moment of directional statistics)."""
    angles = 2 * np.pi * outward_starts(program) / program.counts_per_turn
    return float(abs(np.exp(1j * q * angles).mean()))


@pytest.mark.parametrize("q", range(1, MOST_Q + 1))
def test_p_over_q_gathers_in_q_bundles_and_is_found(q: int) -> None:
    program = regular(90 + 1 / q if q > 1 else 90)
    assert gathered(program, q) > 0.9
    found = ribbon(program)
    assert found is not None
    assert found.q == q
    assert found.turns == pytest.approx(90 + (1 / q if q > 1 else 0), abs=1e-3)
    assert found.repeats == int(TURNS / found.turns) // q


def test_beyond_the_largest_q_nothing_is_said() -> None:
    assert ribbon(regular(90 + 1 / 11)) is None


@settings(max_examples=60)
@given(st.floats(20, 140))
def test_a_clear_lay_is_no_ribbon_and_a_ribbon_is_not_clear(double: float) -> None:
    doubles = TURNS / double
    found = ribbon(regular(double))
    if is_clear(double, doubles):
        assert found is None
        assert all(gathered(regular(double), q) < 0.35 for q in range(1, MOST_Q + 1))
    if found is not None:
        assert abs(found.q * double - round(found.q * double)) < near_shift(doubles) + 0.01


@given(st.floats(10, 200), st.floats(20, 400))
def test_the_nearest_clear_number_is_clear_and_near(double: float, doubles: float) -> None:
    offered = nearest_clear(double, 2, lambda turns: turns, doubles)
    assert offered is not None
    assert is_clear(offered, doubles)
    assert abs(offered - double) < 0.2


def test_nothing_clear_nothing_offered() -> None:
    assert nearest_clear(2.0, 0, lambda turns: turns, 100) is None


def test_the_play_of_the_drive_changes_nothing() -> None:
    assert ribbon(regular(90.5, backlash=40, take_up=400)) == ribbon(regular(90.5))


def test_a_coil_of_few_passes_or_a_guiding_hand_makes_no_ribbons() -> None:
    assert ribbon(regular(90, turns=300)) is None
    assert ribbon(hand_program(8000, 400, 200.0)) is None
