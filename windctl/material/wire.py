"""One enamelled wire, as far as a coil depends on it."""

from __future__ import annotations

import math
from dataclasses import dataclass

from windctl.material.copper import DENSITY_G_CM3 as COPPER_G_CM3
from windctl.material.enamel import DENSITY_G_CM3 as ENAMEL_G_CM3
from windctl.material.enamel import Grade, increase_mm
from windctl.material.gauge import (
    awg_diameter_mm,
    awg_number,
    metric_ohm_per_m,
    ohm_per_m_of,
    tolerance_rel,
)

# A table's least and greatest value are read as a 95 % range (k = 2): makers aim at the middle, and few
# spools come near the ends. So one standard deviation is a quarter of the range: 4 % in ohm/m for 0.063 mm.
_RANGE_IN_SD = 4.0

# A hand micrometer on enamel: 1 um of resolution and of squeezing. Our judgement.
_MICROMETER_SD_MM = 0.001

# A metre or more of wire measured on a bench without a stated uncertainty. Our judgement.
_MEASURED_OHM_SD_REL = 0.01


@dataclass(frozen=True, slots=True)
class Wire:
    """Diameters in mm, resistance in ohm per metre at 20 degrees C, mass (copper and enamel) in g per metre.

    `*_sd*` are standard deviations from spool to spool.
    """

    bare_mm: float
    overall_mm: float
    overall_sd_mm: float
    ohm_per_m: float
    ohm_per_m_sd: float
    mass_g_per_m: float
    label: str

    @property
    def overall_area_mm2(self) -> float:
        """Cross-section with enamel, mm2: what the wire takes in the winding window."""
        return math.pi / 4 * self.overall_mm**2

    @property
    def copper_area_mm2(self) -> float:
        """Cross-section of the copper, mm2: what carries current and pull."""
        return math.pi / 4 * self.bare_mm**2


def resolve(
    *,
    gauge: str | None = None,
    diameter_mm: float | None = None,
    enamel: Grade | None = None,
    overall_mm: float | None = None,
    ohm_per_m: float | None = None,
    ohm_per_m_sd: float | None = None,
) -> Wire:
    """Everything about a wire from what is known of it.

    Exactly one of gauge ("AWG 42") and diameter_mm, exactly one of enamel grade and overall_mm. A gauge
    size takes the exact gauge law and 1/58 ohm mm2/m, a metric one the metric table's nominal. A measured
    ohm_per_m (at 20 degrees C) beats both. Raises ValueError when the wire is impossible or in no table.
    """
    if (gauge is None) == (diameter_mm is None):
        raise ValueError("give exactly one of gauge and diameter_mm")
    if (enamel is None) == (overall_mm is None):
        raise ValueError("give exactly one of enamel and overall_mm")
    bare = bare_mm_of(gauge, diameter_mm)
    table_ohm = ohm_per_m_of(bare) if gauge is not None else metric_ohm_per_m(bare)
    size = gauge if gauge is not None else f"{bare:g} mm"
    overall, overall_sd, coat = _overall(bare, enamel, overall_mm)
    ohm = table_ohm if ohm_per_m is None else ohm_per_m
    sd = ohm_per_m_sd if ohm_per_m_sd is not None else ohm * _ohm_sd_rel(bare, measured=ohm_per_m is not None)
    return Wire(bare, overall, overall_sd, ohm, sd, mass_g_per_m(bare, overall), f"{size}, {coat}")


def bare_mm_of(gauge: str | None, diameter_mm: float | None) -> float:
    """Bare diameter, mm, of whichever of the two is given; ValueError when it is no size."""
    if gauge is not None:
        return awg_diameter_mm(awg_number(gauge))
    if diameter_mm is None or not diameter_mm > 0:
        raise ValueError("a bare diameter must be more than 0 mm")
    return diameter_mm


def _overall(bare: float, grade: Grade | None, overall_mm: float | None) -> tuple[float, float, str]:
    if grade is not None:
        least, greatest = increase_mm(bare, grade)
        return bare + (least + greatest) / 2, (greatest - least) / _RANGE_IN_SD, grade
    assert overall_mm is not None  # exactly one is given
    if overall_mm < bare:
        raise ValueError(f"an overall diameter of {overall_mm:g} mm is less than the bare {bare:.4g} mm")
    return overall_mm, _MICROMETER_SD_MM, f"{overall_mm:g} mm overall"


def _ohm_sd_rel(bare: float, *, measured: bool) -> float:
    return _MEASURED_OHM_SD_REL if measured else 2 * tolerance_rel(bare) / _RANGE_IN_SD


def mass_g_per_m(bare_mm: float, overall_mm: float) -> float:
    """Copper and enamel of a metre, g: mm2 times g/cm3 is g/m."""
    copper_mm2 = math.pi / 4 * bare_mm**2
    enamel_mm2 = math.pi / 4 * (overall_mm**2 - bare_mm**2)
    return copper_mm2 * COPPER_G_CM3 + enamel_mm2 * ENAMEL_G_CM3


def mass_slopes(bare_mm: float, overall_mm: float) -> tuple[float, float]:
    """How the logarithm of the mass goes with those of the bare and of the overall cross-section."""
    mass = mass_g_per_m(bare_mm, overall_mm)
    by_bare = math.pi / 4 * bare_mm**2 * (COPPER_G_CM3 - ENAMEL_G_CM3) / mass
    return by_bare, math.pi / 4 * overall_mm**2 * ENAMEL_G_CM3 / mass
