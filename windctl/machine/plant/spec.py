"""What stands on the bench before chance is asked: the machine as bought, the coil as the recipe means it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

ReadingsMode = Literal["live", "checks", "none"]

MILLIOHM_PER_UNIT = 305  # 20 kilohm over the 65 534 steps below "open"
TENSION_UNIT = 10  # 0.0001 cN each: 65 cN over the scale
LAST_UNIT = 65_534
OPEN = 0xFFFF


@dataclass(frozen=True, slots=True)
class PlantSpec:
    """Lengths in mm, resistances in ohm (wire per metre, at 20 degrees C), temperatures in degrees C or K.

    `*_sd` are standard deviations of what chance may do to the figure before them; `_rel` is relative, `_pct`
    per cent.
    """

    # the bobbin
    perimeter_mm: float
    perimeter_sd_rel: float
    straight_mm: float  # length of one long side; there are two
    core_area_mm2: float
    gap_mm: float
    # the wire
    ohm_per_m: float
    ohm_per_m_sd: float
    overall_mm: float
    overall_sd_mm: float
    # how it is laid
    packing: float
    packing_sd: float
    margin_mm: float
    turns: float  # planned, the scale on which the packing loosens
    turns_per_pass: float  # of a guiding hand
    # spindle
    drive: bool = True
    counts_per_turn: int = 400
    steps_per_turn: int = 400
    index: bool = True
    cruise_rpm: float = 600.0
    # guide
    guide: bool = True
    steps_per_mm: float = 200.0
    backlash_mm: float = 0.0
    travel_mm: float = 60.0
    distance_mm: float = 100.0
    # tension
    tension_sensor: bool = True
    tension_cn: float = 12.0
    tension_unit: int = TENSION_UNIT
    # readings
    readings: ReadingsMode = "live"
    milliohm_per_unit: int = MILLIOHM_PER_UNIT
    lead_ohm: float = 0.5
    lead_sd_ohm: float = 0.3
    gain_sd_pct: float = 0.3
    noise_pct: float = 0.1
    floor_ohm: float = 0.2
    celsius_sd: float = 0.5
    coil_over_air_k: float = 0.7
    coil_over_air_sd_k: float = 0.7
    contact_length_mm: float = 150.0


def scale_for(ohm: float) -> int:
    """Milliohm per unit of a contact input that must show `ohm`: the common scale, or a larger coil's."""
    return max(MILLIOHM_PER_UNIT, int(ohm * 1000.0 / LAST_UNIT) + 1)
