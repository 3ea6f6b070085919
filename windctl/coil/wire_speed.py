"""How fast the wire runs while a bobbin that is not round turns.

A taut wire from a standing guide touches the turning outline at a tangent. Its speed at the guide is the
spindle's angular speed times the distance p from the axis to the wire's line: pull times wire speed is
the power that the spindle's torque, pull times p, puts in. With the tangent's normal at angle a in the
bobbin, p is the outline's support function h(a) = R + A|cos a| + B|sin a| (R corner radius, A and B half
the straight parts), and a guide at distance D from the axis has that tangent when its bearing, seen from
the bobbin, is a - arccos(h(a) / D). So over a revolution, at whatever distance the guide is,

    mean speed = w * P / (2 * pi)     P the perimeter; what arccos adds is periodic and has no mean
    peak speed = w * (R + hypot(A, B))

and both are exact. `over_a_revolution` gives the course between them.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass

from windctl.coil.geometry import Core


@dataclass(frozen=True, slots=True)
class WireSpeed:
    """Wire speed at the guide over a revolution, m/s."""

    mean_m_s: float
    peak_m_s: float


def wire_speed(outline: Core, rpm: float) -> WireSpeed:
    """Mean and peak while `outline` turns at `rpm`."""
    w = rpm * 2 * math.pi / 60
    return WireSpeed(w * outline.perimeter_mm / (2 * math.pi) / 1000, w * outline.reach_mm / 1000)


def over_a_revolution(
    outline: Core, rpm: float, guide_distance_mm: float, points: int = 360
) -> Iterator[tuple[float, float]]:
    """(the guide's bearing seen from the bobbin, radians; wire speed, m/s) over one revolution, in order.

    guide_distance_mm is from the axis to the guide, more than the outline's reach, else ValueError.
    """
    if guide_distance_mm <= outline.reach_mm:
        raise ValueError(
            f"the guide at {guide_distance_mm:g} mm from the axis is within the bobbin's reach of "
            f"{outline.reach_mm:g} mm"
        )
    w = rpm * 2 * math.pi / 60
    for point in range(points):
        normal = 2 * math.pi * point / points
        lever = outline.support_mm(normal)
        yield normal - math.acos(lever / guide_distance_mm), w * lever / 1000
