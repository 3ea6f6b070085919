"""Which way the bobbin turns: worked out with vectors, not with the rule of the code."""

from __future__ import annotations

import itertools
import math

import pytest

from windctl.recipe.orientation import Flange, Mounted, Way, opposite, orientation

WAYS: tuple[Way, ...] = ("cw", "ccw")
MOUNTED: tuple[Mounted, ...] = ("face out", "face in")
FLANGES: tuple[Flange, ...] = ("face", "base")


def _seen(points: list[tuple[float, float, float]], eye_z: float) -> Way:
    """Which way points go round the z axis for an eye on it at eye_z that looks at the origin."""
    (x0, y0, _), (x1, y1, _) = points[0], points[1]
    anticlockwise_from_plus_z = x0 * y1 - x1 * y0 > 0
    return "ccw" if anticlockwise_from_plus_z == (eye_z > 0) else "cw"


@pytest.mark.parametrize(("way", "mounted"), [*itertools.product(WAYS, MOUNTED)])
def test_the_spindle_winds_the_wire_the_way_that_was_asked(way: Way, mounted: Mounted) -> None:
    """The operator looks from +z at the bobbin, the motor is at -z; a guide stands still at angle 0. While
    the bobbin turns by t, the wire comes to lie at its own angle -t. From the face, that must go `way`."""
    spindle = orientation(way, mounted, "face").spindle
    sense = 1.0 if spindle == "ccw" else -1.0  # counter-clockwise for the operator is positive about +z
    laid = [-sense * t for t in (0.0, 0.1)]  # angles on the bobbin, about +z
    points = [(math.cos(angle), math.sin(angle), 0.0) for angle in laid]
    face_z = 1.0 if mounted == "face out" else -1.0
    assert _seen(points, face_z) == way


def test_face_out_is_the_plain_case() -> None:
    """Common practice, no source: the bobbin turns against the way the wire runs round it."""
    plain = orientation("cw", "face out", "face")
    assert (plain.spindle, plain.wire_from_operator, plain.start_side) == ("ccw", "cw", "operator")


@pytest.mark.parametrize(("way", "mounted", "flange"), [*itertools.product(WAYS, MOUNTED, FLANGES)])
def test_turning_the_bobbin_round_or_the_wire_round_mirrors(
    way: Way, mounted: Mounted, flange: Flange
) -> None:
    here = orientation(way, mounted, flange)
    assert orientation(opposite(way), mounted, flange).spindle == opposite(here.spindle)
    (other_face,) = set(MOUNTED) - {mounted}
    assert orientation(way, other_face, flange).spindle == opposite(here.spindle)
    assert orientation(way, other_face, flange).start_side != here.start_side
    (other_flange,) = set(FLANGES) - {flange}
    assert orientation(way, mounted, other_flange).start_side != here.start_side
    assert here.spindle == opposite(here.wire_from_operator)
