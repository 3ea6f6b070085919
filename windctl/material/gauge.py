"""Sizes of bare round wire: the gauge law, and the metric series with its resistance limits."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from itertools import pairwise

from windctl.material.copper import RESISTIVITY_20C

FINEST_AWG = 56
COARSEST_AWG = 1

_NAME = re.compile(r"AWG ([1-9][0-9]?)")


def awg_diameter_mm(number: int) -> float:
    """Bare diameter, mm, by the exact law of ASTM B258: no. 36 is 0.0050 in, no. 0000 is 0.4600 in, with
    39 equal ratios between. Not rounded to the mil: the rounded size differs by up to 3 % in resistance."""
    if not COARSEST_AWG <= number <= FINEST_AWG:
        raise ValueError(f"AWG {number} is outside AWG {COARSEST_AWG} to AWG {FINEST_AWG}")
    return 0.127 * math.pow(92.0, (36 - number) / 39)


def awg_number(name: str) -> int:
    """The number in a gauge's name, written `AWG 42`. Raises ValueError for anything else."""
    match = _NAME.fullmatch(name)
    if match is None:
        raise ValueError('not a gauge; write it like "AWG 42"')
    number = int(match.group(1))
    if not COARSEST_AWG <= number <= FINEST_AWG:
        raise ValueError(f"outside AWG {COARSEST_AWG} to AWG {FINEST_AWG}")
    return number


@dataclass(frozen=True, slots=True)
class MetricSize:
    """One size of IEC 60317-0-1, as in a wire maker's published table.

    Diameters in mm; `grade1`, `grade2`: least and greatest overall diameter; ohm per metre at 20 degrees C.
    """

    bare_mm: float
    grade1_mm: tuple[float, float]
    grade2_mm: tuple[float, float]
    ohm_per_m_min: float
    ohm_per_m: float
    ohm_per_m_max: float


METRIC: tuple[MetricSize, ...] = (
    MetricSize(0.050, (0.055, 0.060), (0.061, 0.066), 7.922, 8.706, 9.489),
    MetricSize(0.056, (0.062, 0.067), (0.068, 0.074), 6.316, 6.940, 7.565),
    MetricSize(0.060, (0.066, 0.072), (0.073, 0.079), 5.562, 6.046, 6.529),
    MetricSize(0.063, (0.069, 0.076), (0.077, 0.083), 5.045, 5.484, 5.922),
    MetricSize(0.067, (0.074, 0.080), (0.081, 0.088), 4.404, 4.848, 5.359),
    MetricSize(0.071, (0.078, 0.084), (0.085, 0.091), 3.941, 4.318, 4.747),
    MetricSize(0.080, (0.087, 0.094), (0.095, 0.101), 3.133, 3.401, 3.703),
    MetricSize(0.090, (0.098, 0.105), (0.106, 0.113), 2.495, 2.687, 2.900),
    MetricSize(0.100, (0.108, 0.117), (0.118, 0.125), 2.034, 2.176, 2.333),
)

_METRIC_RESISTIVITY = 1 / 58.5  # ohm mm2/m: what the nominal column of the metric table is computed with


def ohm_per_m_of(bare_mm: float, resistivity: float = RESISTIVITY_20C) -> float:
    """Ohm per metre at 20 degrees C of a round copper wire; resistivity in ohm mm2/m."""
    return resistivity / (math.pi / 4 * bare_mm**2)


def bare_mm_for(ohm_per_m: float, resistivity: float = RESISTIVITY_20C) -> float:
    """Diameter, mm, of a round copper wire that has so much per metre at 20 degrees C."""
    return math.sqrt(resistivity / (math.pi / 4 * ohm_per_m))


def metric_size(bare_mm: float) -> MetricSize | None:
    """The row of the metric table for this nominal diameter, or None between the sizes."""
    return next((size for size in METRIC if math.isclose(size.bare_mm, bare_mm, rel_tol=1e-9)), None)


def metric_ohm_per_m(bare_mm: float) -> float:
    """Nominal ohm per metre of a metric wire: the table's, and between its sizes the table's own law."""
    size = metric_size(bare_mm)
    return size.ohm_per_m if size is not None else ohm_per_m_of(bare_mm, _METRIC_RESISTIVITY)


def tolerance_rel(bare_mm: float) -> float:
    """Half of the allowed spread of the ohm per metre, relative to the nominal: 0.08 for 0.063 mm.

    Between two sizes the relative half-width is interpolated. Below the table its first row's holds (finer
    wire is not held to anything tighter). Above it, the law that makes the table: +-0.003 mm, 1/59 to 1/58.
    """
    if bare_mm > METRIC[-1].bare_mm:
        greatest = ohm_per_m_of(bare_mm - 0.003, 1 / 58)
        least = ohm_per_m_of(bare_mm + 0.003, 1 / 59)
        return (greatest - least) / 2 / ohm_per_m_of(bare_mm, _METRIC_RESISTIVITY)
    widths = [(size.ohm_per_m_max - size.ohm_per_m_min) / 2 / size.ohm_per_m for size in METRIC]
    return interpolate(bare_mm, [size.bare_mm for size in METRIC], widths)


def interpolate(x: float, xs: list[float], ys: list[float]) -> float:
    """Piecewise linear through (xs, ys), xs rising; the end values beyond the ends."""
    if x <= xs[0]:
        return ys[0]
    for (x0, x1), (y0, y1) in zip(pairwise(xs), pairwise(ys), strict=True):
        if x <= x1:
            return y0 + (y1 - y0) * (x - x0) / (x1 - x0)
    return ys[-1]
