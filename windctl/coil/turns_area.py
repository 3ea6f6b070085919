"""What the turns of a coil enclose: turns times mean area, which is what picks up hum.

A turn at build b round a convex core of area A0 and perimeter P0 encloses A0 + P0*b + pi*b^2, exactly
(Steiner). Where wire lies along the gap h with density f (its integral is 1), the build at the end is B*h*f
there, the turns under it are spread evenly over it, and as many of all turns lie there as f says. So the mean
area of the turns is

    A0 + P0*k*B/2 + (h^2 * integral f^3) * pi*B^2/3,    k = h * integral f^2

and with the growth G = k*B that the length of the wire shows (mean turn P0 + pi*G), and the third moment
q = (h^2 * integral f^3) / k^2, which is 1 for a flat lay and little more for others,

    A0 + P0*G/2 + q*pi*G^2/3

Long sides bow outwards: two shallow arcs of height bow*b over the straight s enclose 2*s*(2/3)*bow*b more,
which the length, and so the resistance, does not show. Averaged over the turns that is (2/3)*s*bow*G.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from windctl.coil.fit import bulge
from windctl.coil.geometry import Core

# The third moment of a lay whose crown factor is known goes up by about a third of what that has above 1
# (triangle 0.375, parabola 0.357, half sine 0.346), and not at all where a flat lay stops short of the
# flanges. Halfway, and as unsure as both together.
_THIRD_PER_CROWN, _THIRD_SD = 0.18, 0.1

# How the long sides bow is for the most part each coil's own: tension and chance decide. Our judgement; the
# two together are what the fit of a coil is judged with.
_BOW_OWN = 0.8


def mean_area_mm2(core: Core, growth_mm: float, third: float = 1.0, bow: float = 0.0) -> float:
    """Mean enclosed area of a turn, mm2, from G, q and how much more the long sides build up."""
    flat = core.area_mm2 + core.perimeter_mm * growth_mm / 2 + third * math.pi * growth_mm**2 / 3
    return flat + 2 / 3 * core.straight_mm * bow * growth_mm


@dataclass(frozen=True, slots=True)
class Winding:
    """The outline of a finished coil's turns. growth_mm: k*B, mean build times crown factor; crown: k; bow:
    how much more the long sides build up than the ends."""

    core: Core
    growth_mm: float
    crown: float = 1.0
    bow: float = 0.0

    @property
    def third(self) -> float:
        """q: the lay's third moment over the square of its second."""
        return third_moment(self.crown)[0]

    @property
    def mean_turn_mm(self) -> float:
        """Mean length of a turn, mm."""
        return self.core.perimeter_mm + math.pi * self.growth_mm

    @property
    def mean_area_mm2(self) -> float:
        """Mean enclosed area of a turn, mm2."""
        return mean_area_mm2(self.core, self.growth_mm, self.third, self.bow)


@dataclass(frozen=True, slots=True)
class Slopes:
    """By how much the logarithm of the mean area goes with those of perimeter and growth, with the bow (as it
    is), and with the logarithm of the third moment."""

    perimeter: float
    growth: float
    bow: float
    third: float


def third_moment(crown: float) -> tuple[float, float]:
    """q for a lay of this crown factor, and its standard deviation."""
    above = max(crown - 1.0, 0.0)
    return 1.0 + _THIRD_PER_CROWN * above, _THIRD_SD * above


def winding_of(core: Core, perimeter_rel: float, growth_mm: float, crown: float) -> Winding:
    """The winding on a core whose perimeter is off by the factor e^perimeter_rel: it is grown (or shrunk)
    evenly to it, as tape, lacquer and a worn mould do; with the usual bow."""
    more_mm = core.perimeter_mm * math.expm1(perimeter_rel) / (2 * math.pi)
    grown = core.grown(max(more_mm, -core.radius_mm))
    return Winding(grown, growth_mm, crown, bulge(core)[0])


def slopes(winding: Winding) -> Slopes:
    """At this winding. A perimeter longer by dP encloses P0/(2*pi) * dP more core, and dP/2 * G more under
    the turns."""
    core, grown, area = winding.core, winding.growth_mm, winding.mean_area_mm2
    perimeter = core.perimeter_mm * (core.perimeter_mm / (2 * math.pi) + grown / 2)
    sides = 2 / 3 * core.straight_mm * grown
    second = winding.third * math.pi * grown**2 / 3
    growth = core.perimeter_mm * grown / 2 + 2 * second + sides * winding.bow
    return Slopes(perimeter / area, growth / area, sides / area, second / area)


def bow_sd(core: Core) -> tuple[float, float]:
    """Standard deviation of the bow: what coils of one lay have in common, and what each has for itself."""
    whole = bulge(core)[1]
    own = _BOW_OWN * whole
    return math.sqrt(whole**2 - own**2), own
