"""What turns enclose, against sums over polygons, one for every turn."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.coil.polygons import area_of, length_of, outline
from windctl.coil.geometry import Core
from windctl.coil.turns_area import (
    Winding,
    bow_sd,
    mean_area_mm2,
    slopes,
    third_moment,
    winding_of,
)

CORE = Core(25.0, 0.0, 3.0)  # straight 50 mm, end radius 3 mm
SQUARE = Core(12.0, 4.0, 1.0)

# Densities over the gap from 0 to 1, their crown factors and third moments by hand.
DENSITIES: dict[str, tuple[Callable[[float], float], float, float]] = {
    "uniform": (lambda x: 1.0, 1.0, 1.0),
    "triangle": (lambda x: 2.0 * x, 4 / 3, 2.0),
    "parabola": (lambda x: 6.0 * x * (1.0 - x), 6 / 5, 54 / 35),
    "half sine": (lambda x: math.pi / 2 * math.sin(math.pi * x), math.pi**2 / 8, math.pi**2 / 6),
    "short of the flanges": (lambda x: 1.1 if 1 / 22 < x < 21 / 22 else 0.0, 1.1, 1.21),
}


def wound(core: Core, build_mm: float, density: Callable[[float], float]) -> tuple[float, float]:
    """Mean area and mean length of turns laid one by one: as many at a place as the density says, at all
    builds up to what it has grown to there."""
    places = (np.arange(66) + 0.5) / 66
    share = np.array([density(float(x)) for x in places])
    share /= share.mean()
    area = length = 0.0
    for part in share[share > 0]:
        for step in range(10):
            points = outline(
                core.half_long_mm, core.half_short_mm, core.radius_mm, build_mm * part * (step + 0.5) / 10, 24
            )
            area += part / 66 * area_of(points) / 10
            length += part / 66 * length_of(points) / 10
    return area, length


@pytest.mark.parametrize("name", DENSITIES)
@pytest.mark.parametrize("core", [CORE, SQUARE], ids=["racetrack", "rectangle"])
def test_the_mean_area_is_that_of_polygons_one_for_each_turn(core: Core, name: str) -> None:
    density, crown, cube = DENSITIES[name]
    area, length = wound(core, 3.5, density)
    growth = 3.5 * crown
    assert mean_area_mm2(core, growth, cube / crown**2) == pytest.approx(area, rel=6e-4)
    assert Winding(core, growth, crown).mean_turn_mm == pytest.approx(length, rel=6e-4)


@pytest.mark.parametrize("name", DENSITIES)
def test_a_third_moment_guessed_from_the_crown_is_within_its_uncertainty(name: str) -> None:
    _, crown, cube = DENSITIES[name]
    guess, sd = third_moment(crown)
    assert abs(cube / crown**2 - guess) <= 2 * sd + 1e-12
    # and hardly matters: of the worked case's area it is a part in a thousand
    off = mean_area_mm2(CORE, 3.5 * crown, cube / crown**2) / Winding(CORE, 3.5 * crown, crown).mean_area_mm2
    assert abs(off - 1) < 2.5e-3


def test_the_bow_of_the_long_sides_encloses_what_two_arcs_do_and_takes_no_wire() -> None:
    """Each turn with both straights replaced by shallow arcs (circles' and parabolas' are alike there)."""
    areas, lengths = [], []
    bow, builds = 0.15, 3.5 * (np.arange(200) + 0.5) / 200
    for build in builds:
        points = outline(25.0, 0.0, 3.0, build)
        along = np.linspace(-25.0, 25.0, 400)
        arc = bow * build * (1 - (along / 25.0) ** 2)
        right = points[points[:, 0] >= 25.0]
        left = points[points[:, 0] <= -25.0]
        upper = np.stack([along[::-1], 3.0 + build + arc], axis=1)
        lower = np.stack([along, -3.0 - build - arc], axis=1)
        ends = [right[right[:, 1] >= 0], upper, left, lower, right[right[:, 1] < 0]]
        whole = np.concatenate(ends)
        areas.append(area_of(whole))
        lengths.append(length_of(whole))
    assert mean_area_mm2(CORE, 3.5, 1.0, bow) == pytest.approx(np.mean(areas), rel=3e-4)
    assert Winding(CORE, 3.5).mean_turn_mm == pytest.approx(np.mean(lengths), rel=3e-4)


def test_the_worked_case_encloses_what_its_formula_says() -> None:
    """Straight 50 mm, end radius 3 mm, build 3.5 mm: A0 + P0*B/2 + pi*B^2/3 for a flat lay, by hand."""
    core = 50 * 6 + math.pi * 9
    around = 100 + 6 * math.pi
    assert mean_area_mm2(CORE, 3.5) == pytest.approx(core + around * 1.75 + math.pi * 3.5**2 / 3, rel=1e-12)


@given(
    perimeter=st.floats(-0.01, 0.01),
    growth=st.floats(0.5, 8.0),
    crown=st.floats(1.0, 1.3),
    half=st.floats(0.0, 35.0),
    radius=st.floats(1.0, 8.0),
)
def test_slopes_are_those_of_the_area_itself(
    perimeter: float, growth: float, crown: float, half: float, radius: float
) -> None:
    core, step = Core(half, 0.0, radius), 1e-5

    def log_area(p: float, g: float, bow: float, third: float) -> float:
        w = winding_of(core, perimeter + p, growth * math.exp(g), crown)
        return math.log(mean_area_mm2(w.core, w.growth_mm, w.third * math.exp(third), w.bow + bow))

    slope = slopes(winding_of(core, perimeter, growth, crown))
    for at, known in enumerate((slope.perimeter, slope.growth, slope.bow, slope.third)):
        up, down = [0.0] * 4, [0.0] * 4
        up[at], down[at] = step, -step
        assert (log_area(*up) - log_area(*down)) / (2 * step) == pytest.approx(known, rel=1e-4, abs=1e-6)


def test_a_longer_perimeter_is_a_core_grown_evenly() -> None:
    grown = winding_of(CORE, math.log(1.01), 3.0, 1.0).core
    assert grown.perimeter_mm == pytest.approx(1.01 * CORE.perimeter_mm)
    assert grown.half_long_mm == CORE.half_long_mm
    points = outline(25.0, 0.0, 3.0, 0.01 * CORE.perimeter_mm / (2 * math.pi))
    assert grown.area_mm2 == pytest.approx(area_of(points), rel=1e-5)


def test_a_core_cannot_shrink_to_less_than_its_straights() -> None:
    assert winding_of(Core(25.0, 0.0, 0.2), -0.05, 3.0, 1.0).core.radius_mm == 0.0


def test_a_round_coil_does_not_bow() -> None:
    assert bow_sd(Core(0.0, 0.0, 8.0)) == (0.0, 0.0)
    common, own = bow_sd(CORE)
    assert 0 < common < own < 0.05
