"""The core's outline against polygons and published formulas."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.coil.geometry import Core, core_of
from windctl.recipe.tables import Bobbin


def bobbin(length: float, width: float, radius: float, perimeter: float | None = None) -> Bobbin:
    return Bobbin(
        core_length_mm=length,
        core_width_mm=width,
        corner_radius_mm=radius,
        core_perimeter_mm=perimeter,
        flange_gap_mm=11.0,
        flange_depth_mm=5.0,
    )


def polygon(core: Core, points: int = 4000) -> list[tuple[float, float]]:
    """Points on the outline: the corner's centre plus the radius along each normal."""
    outline = []
    for i in range(points):
        angle = 2 * math.pi * (i + 0.5) / points
        c, s = math.cos(angle), math.sin(angle)
        outline.append(
            (
                math.copysign(core.half_long_mm, c) + core.radius_mm * c,
                math.copysign(core.half_short_mm, s) + core.radius_mm * s,
            )
        )
    return outline


cores = st.builds(Core, st.floats(0, 40, allow_subnormal=False), st.floats(0, 20), st.floats(0.5, 20))


@given(cores)
def test_perimeter_and_area_are_those_of_the_drawn_outline(core: Core) -> None:
    points = polygon(core)
    edges = list(zip(points, points[1:] + points[:1], strict=True))
    assert core.perimeter_mm == pytest.approx(sum(math.dist(a, b) for a, b in edges), rel=1e-5)
    shoelace = sum(a[0] * b[1] - b[0] * a[1] for a, b in edges) / 2
    assert core.area_mm2 == pytest.approx(shoelace, rel=1e-5)


@given(cores, st.floats(0, 2 * math.pi))
def test_the_support_is_the_farthest_point_in_that_direction(core: Core, angle: float) -> None:
    c, s = math.cos(angle), math.sin(angle)
    assert core.support_mm(angle) == pytest.approx(max(x * c + y * s for x, y in polygon(core)), rel=1e-5)


@given(cores, st.floats(0, 10))
def test_a_parallel_outline_is_longer_by_two_pi_times_the_build(core: Core, build: float) -> None:
    # P(b) = P0 + 2 pi b for any convex outline: Steiner's formula.
    assert core.grown(build).perimeter_mm == pytest.approx(core.perimeter_mm + 2 * math.pi * build)


def test_the_racetrack_of_56_by_6_mm() -> None:
    core = core_of(bobbin(56, 6, 3))
    assert core.straight_mm == 50
    assert core.perimeter_mm == pytest.approx(2 * 50 + 2 * math.pi * 3)
    assert core.area_mm2 == pytest.approx(50 * 6 + math.pi * 9)


def test_sharp_and_round_corners_lie_between_rectangle_and_racetrack() -> None:
    assert core_of(bobbin(56, 6, 0)).perimeter_mm == 2 * (56 + 6)
    assert core_of(bobbin(20, 20, 10)).perimeter_mm == pytest.approx(math.pi * 20)


@pytest.mark.parametrize("measured", [113.0, 118.0, 122.5])
def test_a_measured_perimeter_wins(measured: float) -> None:
    core = core_of(bobbin(56, 6, 3, measured))
    assert core.perimeter_mm == pytest.approx(measured)
    assert (core.area_mm2 > core_of(bobbin(56, 6, 3)).area_mm2) == (measured > 118.85)


def test_a_measured_perimeter_may_use_up_sharp_corners() -> None:
    assert core_of(bobbin(56, 6, 0, 120.0)).perimeter_mm == pytest.approx(120.0)
