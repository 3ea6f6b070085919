"""Which way the spindle turns for a wire direction, and on which side the lay starts.

The wire comes from a standing guide, so the bobbin turns against the way the wire runs round it. Whether that
is clockwise at the machine depends on which face of the bobbin the operator sees.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

Way = Literal["cw", "ccw"]
Mounted = Literal["face out", "face in"]
Flange = Literal["face", "base"]
Side = Literal["operator", "motor"]


@dataclass(frozen=True, slots=True)
class Orientation:
    """How the bobbin sits and turns, as the operator sees it looking along the spindle towards the motor."""

    spindle: Way
    start_side: Side
    wire_from_operator: Way


def opposite(way: Way) -> Way:
    """The other way round."""
    return "ccw" if way == "cw" else "cw"


def orientation(direction_from_face: Way, mounted: Mounted, start_flange: Flange) -> Orientation:
    """direction_from_face: the wire's way round from start to finish, seen from the side facing the strings.

    Face out, that face looks at the operator, who sees the same direction; face in, the operator sees the
    bobbin from behind and every direction is mirrored.
    """
    face_out = mounted == "face out"
    seen = direction_from_face if face_out else opposite(direction_from_face)
    starts_at_operator = (start_flange == "face") == face_out
    return Orientation(opposite(seen), "operator" if starts_at_operator else "motor", seen)
