"""The core that the wire lies on, and what lies round it at a given build."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from windctl.recipe.tables import Bobbin


@dataclass(frozen=True, slots=True)
class Core:
    """A convex outline: a rectangle with round corners, or that outline grown evenly to a measured perimeter.

    Lengths in mm. `half_long` and `half_short` are half the straight parts of the long and the short sides:
    the corners' centres lie at (+-half_long, +-half_short), and `radius_mm` is the corners' radius.
    """

    half_long_mm: float
    half_short_mm: float
    radius_mm: float

    @property
    def perimeter_mm(self) -> float:
        """Length round it, mm."""
        return 4 * (self.half_long_mm + self.half_short_mm) + 2 * math.pi * self.radius_mm

    @property
    def area_mm2(self) -> float:
        """Area inside, mm2."""
        rectangle = 4 * self.half_long_mm * self.half_short_mm
        sides = 4 * (self.half_long_mm + self.half_short_mm) * self.radius_mm
        return rectangle + sides + math.pi * self.radius_mm**2

    @property
    def straight_mm(self) -> float:
        """Length of one long side's straight part, mm."""
        return 2 * self.half_long_mm

    def grown(self, build_mm: float) -> Core:
        """The outline `build_mm` outside this one. Its perimeter is 2 * pi * build_mm longer, exactly
        (Steiner's formula for the parallel body of a convex figure)."""
        return Core(self.half_long_mm, self.half_short_mm, self.radius_mm + build_mm)

    def support_mm(self, angle: float) -> float:
        """Distance from the axis to the tangent whose outward normal stands at `angle` (radians, 0 along the
        core's length), mm."""
        along = self.half_long_mm * abs(math.cos(angle))
        across = self.half_short_mm * abs(math.sin(angle))
        return along + across + self.radius_mm

    @property
    def reach_mm(self) -> float:
        """Distance from the axis to the farthest point of the outline, mm."""
        return math.hypot(self.half_long_mm, self.half_short_mm) + self.radius_mm


def core_of(bobbin: Bobbin) -> Core:
    """The core of a recipe's bobbin."""
    return core_from(
        bobbin.core_length_mm, bobbin.core_width_mm, bobbin.corner_radius_mm, bobbin.core_perimeter_mm
    )


def core_from(
    length_mm: float, width_mm: float, corner_radius_mm: float, perimeter_mm: float | None = None
) -> Core:
    """A core from its dimensions. A measured perimeter wins: the outline of the given length, width and
    corners is grown (or shrunk) evenly until it has that perimeter. Where shrinking uses up the corners'
    radius the straight parts shrink instead, in proportion.
    """
    half_long = length_mm / 2 - corner_radius_mm
    half_short = max(width_mm / 2 - corner_radius_mm, 0.0)
    drawn = Core(half_long, half_short, corner_radius_mm)
    if perimeter_mm is None:
        return drawn
    radius = drawn.radius_mm + (perimeter_mm - drawn.perimeter_mm) / (2 * math.pi)
    if radius >= 0:
        return Core(half_long, half_short, radius)
    shrink = perimeter_mm / (4 * (half_long + half_short))
    return Core(half_long * shrink, half_short * shrink, 0.0)
