"""Sliding, against areas reckoned by hand, single steps of sliding, and coils laid turn by turn."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from tests.lay.recipes import WANDER, recipe
from windctl.lay.deposit import STEEPEST, Deposit
from windctl.lay.settle import settle
from windctl.machine.plant.coil_growing import Coil, Spool
from windctl.machine.plant.fate import true_to
from windctl.machine.plant.made_for import plant_for
from windctl.plan.make import make_plan
from windctl.profile.builtin import VIRTUAL
from windctl.recipe.model import Recipe

heaps = arrays(np.float64, st.integers(1, 60), elements=st.floats(0, 8).map(lambda x: round(x, 3)))
steeps = st.floats(0.01, 2.0).map(lambda x: round(x, 3))


@given(heaps, steeps)
def test_nothing_is_lost_and_nothing_stands_steeper(heap: np.ndarray, steepest: float) -> None:
    settled = settle(heap, steepest)
    assert settled.sum() == pytest.approx(heap.sum(), abs=1e-9)
    assert np.abs(np.diff(settled)).max(initial=0.0) <= steepest * 1.01
    assert settled.max() <= heap.max() + 1e-9
    assert settled.min() >= heap.min() - 1e-9


@given(heaps, steeps)
def test_what_stands_stays(heap: np.ndarray, steepest: float) -> None:
    settled = settle(heap, steepest)
    assert settle(settled, steepest * 1.01) == pytest.approx(settled, abs=0.01)


@given(heaps, steeps)
def test_the_other_way_round_is_the_same_the_other_way_round(heap: np.ndarray, steepest: float) -> None:
    assert settle(heap[::-1], steepest)[::-1] == pytest.approx(settle(heap, steepest), abs=0.02)


def test_a_cliff_before_a_wall() -> None:
    """Height H from m on: the slope reaches in to x with s * x^2 / 2 = H * m, as no area is lost."""
    height, margin, slope, n = 4.8, 0.3, 1.2, 2200
    at = (np.arange(n) + 0.5) * 11 / n
    settled = settle(np.where(at > margin, height, 0.0), slope * 11 / n)
    reach = math.sqrt(2 * height * margin / slope)
    expected = np.where(at < reach, height - slope * (reach - at), height)
    assert settled == pytest.approx(expected, abs=0.02)


def test_a_free_edge_slides_as_far_out_as_in() -> None:
    """Height H without a wall: a slope of s from H / 2s inside to H / 2s outside."""
    n = 2000
    at = (np.arange(n) + 0.5) * 20 / n
    settled = settle(np.where(at > 10, 3.0, 0.0), 1.5 * 20 / n)
    assert settled == pytest.approx(np.clip(1.5 * (at - 10) + 1.5, 0, 3), abs=0.02)


def test_a_slope_that_stands_is_left_alone() -> None:
    flank = np.concatenate([np.linspace(0, 3, 50), np.linspace(3, 1, 40)])
    assert settle(flank, 0.07) is flank


def slid(heap: np.ndarray, steepest: float) -> np.ndarray:
    """One pair of neighbours at a time: what stands too steep between them moves over, until nothing does."""
    heights = heap.astype(float).tolist()
    moved = True
    while moved:
        moved = False
        for i in range(len(heights) - 1):
            over = abs(heights[i] - heights[i + 1]) - steepest
            if over > 1e-7:
                moved = True
                over = math.copysign(over / 2, heights[i] - heights[i + 1])
                heights[i], heights[i + 1] = heights[i] - over, heights[i + 1] + over
    return np.array(heights)


def test_as_by_single_steps() -> None:
    at = np.linspace(0, 1, 60)
    for heap in (
        np.where((at > 0.1) & (at < 0.85), 3.0, 0.0),
        np.where(at > 0.3, 1.0 + 2 * at, 0.0),
        np.where(abs(at - 0.5) < 0.1, 2.0, 0.0),
    ):
        assert settle(heap, 0.12) == pytest.approx(slid(heap, 0.12), abs=0.02)


def laid_turn_by_turn(asked: Recipe, steepest: float) -> tuple[float, float, float]:
    """(metres, highest build in mm, crown) of the simulated coil that obeys every figure and slides."""
    plan, spec = make_plan(asked, VIRTUAL), plant_for(asked, VIRTUAL)
    program, margin = plan.program, asked.lay.margin_mm
    coil = Coil(spec, replace(true_to(spec), slide=steepest), 1, Spool(), margin)
    ends = np.arange(1, plan.turns + 1) * program.counts_per_turn
    guide = np.interp(ends, program.count_marks, program.guide_marks) / program.steps_per_mm
    for place in guide.tolist():
        coil.end_turn(place + margin)
    build = np.array(coil.build_mm)
    return coil.ohm / spec.ohm_per_m, float(build.max()), float((build**2).mean() / build.mean() ** 2)


@pytest.mark.parametrize("pattern", ["wander", "stagger"])
def test_as_a_coil_on_which_every_turn_slides_by_itself(pattern: str) -> None:
    """The virtual plant lays turn by turn and knows nothing of this; without sliding it was 0.7 % away."""
    asked = recipe(WANDER, lay__pattern=f'"{pattern}"', lay__margin_mm="0.3", stop__turns="5000")
    plan = make_plan(asked, VIRTUAL)
    metres, highest, crown = laid_turn_by_turn(asked, STEEPEST)
    assert plan.wire_length_m == pytest.approx(metres, rel=5e-4)
    assert plan.crown == pytest.approx(crown, abs=0.005)
    assert plan.peak_build_mm == pytest.approx(highest, rel=0.15)


def test_no_coil_at_all_has_nothing_to_slide() -> None:
    lay = Deposit(np.array([0.0, 2.0, 1.0]))
    assert lay.settled(0.0, 11.0) is lay
