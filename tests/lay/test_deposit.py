"""What a program builds, against densities known in closed form."""

from __future__ import annotations

import numpy as np
import pytest

from tests.lay.recipes import WANDER, machine, recipe
from windctl.lay.deposit import Deposit, crown_of, deposit, guide_path_mm, trailing
from windctl.lay.make import make_program
from windctl.lay.program import Program
from windctl.profile.builtin import VIRTUAL

X = (np.arange(4000) + 0.5) / 4000


@pytest.mark.parametrize(
    ("density", "crown"),
    [
        (np.ones_like(X), 1.0),
        (1 - np.abs(2 * X - 1), 4 / 3),  # triangle
        (X * (1 - X), 6 / 5),  # parabola
        (np.sin(np.pi * X), np.pi**2 / 8),  # half sine
        (np.where(np.abs(X - 0.5) < 0.5 - 0.3 / 11, 1.0, 0.0), 1.0577),  # 0.3 mm short at each side of 11 mm
    ],
)
def test_crowns_known_in_closed_form(density: np.ndarray, crown: float) -> None:
    # h * integral f^2 (computed).
    assert crown_of(density) == pytest.approx(crown, rel=2e-4)


def ramp(turns: int, steps: list[int], counts: int = 400) -> Program:
    """A program that goes through these guide positions, one a turn."""
    guide = np.diff(np.array(steps * (turns // len(steps) + 1))[: turns + 1])
    return Program(np.full(turns, counts, dtype=np.uint16), guide.astype(np.int16), counts, 200.0)


def test_an_even_program_short_of_the_flanges() -> None:
    program = make_program(recipe(lay__margin_mm="0.3"), VIRTUAL)
    laid = deposit(program, gap_mm=11, datum_mm=0.3, overall_mm=0.001)
    assert laid.crown == pytest.approx(11 / 10.4, rel=1e-3)
    assert laid.density.max() == pytest.approx(11 / 10.4, rel=0.01)
    # with real wire the lay reaches half a diameter further: a flat top with slopes a diameter wide
    wire = deposit(program, gap_mm=11, datum_mm=0.3, overall_mm=0.072)
    assert wire.crown == pytest.approx(11 / 10.4**2 * (10.4 - 0.072 / 3), rel=1e-3)


def test_an_even_lay_from_flange_to_flange_is_flat() -> None:
    program = make_program(recipe(lay__margin_mm="0.036"), VIRTUAL)
    laid = deposit(program, gap_mm=11, datum_mm=0.036, overall_mm=0.072)
    assert laid.crown == pytest.approx(1, abs=5e-3)
    assert laid.peak == pytest.approx(1, abs=0.02)


def test_a_pitch_that_grows_along_the_gap_thins_the_lay() -> None:
    """Turn by turn at places whose spacing grows linearly: density 1/spacing, reckoned from the places."""
    places = np.round(np.cumsum(np.linspace(10, 60, 60))).astype(int).tolist()
    there_and_back = [0, *places[:-1], *reversed([0, *places[:-1]])]
    gap = (places[-2]) / 200
    program = ramp(20_000, there_and_back)
    laid = deposit(program, gap_mm=gap, datum_mm=0, overall_mm=0.01)
    spacing = np.diff([0, *places[:-1]]) / 200
    for start, width in zip(np.cumsum(spacing)[5:-5:10], spacing[6:-4:10], strict=True):
        x = (np.arange(len(laid.density)) + 0.5) * gap / len(laid.density)
        inside = (x > start + 0.01) & (x < start + width - 0.01)
        assert laid.density[inside].mean() == pytest.approx(gap / len(spacing) / width, rel=0.05)


def test_all_wire_is_laid_and_none_beyond_the_flanges() -> None:
    program = make_program(recipe(WANDER, lay__margin_mm="-0.4"), VIRTUAL)
    laid = deposit(program, gap_mm=11, datum_mm=-0.4, overall_mm=0.072)
    assert laid.density.mean() == pytest.approx(1)
    assert laid.profile(11).mean() == pytest.approx(1)
    assert laid.profile(11)[0] > 1.3  # what is guided beyond the flange lies against it
    assert laid.profile(11)[5] < 1.0


def test_the_first_turns_alone() -> None:
    program = make_program(recipe(lay__margin_mm="0.0"), VIRTUAL)
    laid = deposit(program, gap_mm=11, datum_mm=0, overall_mm=0.072, turns=5.5 / 0.08)
    assert laid.profile(2) == pytest.approx([2, 0], abs=0.03)


def test_play_does_not_show_in_the_lay() -> None:
    plain = make_program(recipe(), machine())
    played = make_program(recipe(), machine(guide__backlash_mm="0.3"))
    a = guide_path_mm(plain, 0.1)
    b = guide_path_mm(played, 0.1)
    # the guide stands until the play is crossed: at most a turn and a half of pitch
    assert np.abs(a - b).max() <= 0.08 * 1.5 + 0.006
    assert np.abs(a - b).mean() < 0.003


def test_the_wire_trails_a_steady_guide_by_its_pitch_times_the_lag() -> None:
    # dx/ds = (g - x) / L: behind a guide moving at p a turn, the wire settles p * L / turn behind.
    guide = np.arange(2000) * 0.02
    wire = trailing(guide, 0.8 * 4)
    assert len(wire) == len(guide)
    assert guide[-1] - wire[-1] == pytest.approx(0.02 * 0.8 * 4, rel=1e-4)
    # started from rest, it comes up to the guide's speed as 1 - exp(-s turns / L): its way within each sample
    started = np.diff(trailing(np.maximum(guide - 1, 0), 3.2))[50:70] / 0.02
    forgotten = np.exp(-np.arange(21) / 3.2)
    assert started == pytest.approx(1 - 3.2 * (forgotten[:-1] - forgotten[1:]), abs=1e-4)


def test_trailing_is_exact_for_a_straight_path_between_samples() -> None:
    coarse = trailing(np.array([0.0] * 50 + [float(i) for i in range(50)]), 2.0)
    fine = trailing(np.interp(np.arange(0, 99.01, 0.01), np.arange(100), [0.0] * 50 + list(range(50))), 200.0)
    assert coarse == pytest.approx(fine[::100], abs=1e-3)


def test_a_wire_behind_a_standing_guide_stands() -> None:
    assert trailing(np.full(200, 5.0), 3.0) == pytest.approx(np.full(200, 5.0))


def test_no_lag_changes_nothing() -> None:
    path = np.array([0.0, 1.0, 3.0])
    assert trailing(path, 0.0) is path


def test_a_narrow_heap_slides_off_and_a_broad_one_stands() -> None:
    density = np.ones(600)
    density[100:104] = 5.0
    assert Deposit(density, 24).peak == pytest.approx(1 + 4 * 4 / 24)
    density[100:140] = 5.0
    assert Deposit(density, 24).peak == pytest.approx(5.0)
