"""Whether a coil fits between core and flange edge, judged with its uncertainty.

Round the ends the wire's pull presses it down; on long straight sides nothing does, and the winding
stands off: the sides build up 5 to 25 % more than the mean (common practice, no source). The judgement
is made there.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

from windctl.coil.geometry import Core

Fits = Literal["yes", "tight", "no"]

_BULGE = 0.15  # middle of the range, for a core that is mostly long straight sides
_BULGE_SD = 0.05  # a quarter of the range
_FULLY_STRAIGHT = 0.4  # of the perimeter in one long side: 56 x 6 mm has 0.42. Our judgement
_SURE = 1.645  # 95 % of a normal distribution lies below so many standard deviations


@dataclass(frozen=True, slots=True)
class Fit:
    """side_build_mm, side_sd_mm: the highest place of the winding, on a long side. room_mm: the flange's
    depth."""

    fits: Fits
    side_build_mm: float
    side_sd_mm: float
    room_mm: float


def bulge(core: Core) -> tuple[float, float]:
    """How much more the long sides build up than the mean, relative, and its standard deviation.

    None on a round core, full on one whose long side is two fifths of its perimeter, in proportion between.
    """
    share = min(core.straight_mm / core.perimeter_mm / _FULLY_STRAIGHT, 1.0)
    return _BULGE * share, _BULGE_SD * share


def judge_fit(core: Core, peak_build_mm: float, build_sd_rel: float, room_mm: float) -> Fit:
    """peak_build_mm: highest place along the gap, mean round the core; build_sd_rel: its relative uncertainty
    (packing, overall diameter). "yes" where it fits with 95 % probability, "no" where it is more likely
    not to, "tight" between."""
    more, more_sd = bulge(core)
    side = peak_build_mm * (1 + more)
    sd = math.hypot(side * build_sd_rel, peak_build_mm * more_sd)
    if side > room_mm:
        fits: Fits = "no"
    elif side + _SURE * sd > room_mm:
        fits = "tight"
    else:
        fits = "yes"
    return Fit(fits, side, sd, room_mm)
