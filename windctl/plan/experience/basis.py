"""What a coil was believed to be before anything was learnt.

The next coil of another bobbin or another spool profits from what this one taught because both are told as
deviations from such a basis: the drawing, the tables, the usual packing.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import exp, pi

from windctl.coil.buildup import BuildUp
from windctl.material.gauge import bare_mm_for


@dataclass(frozen=True, slots=True)
class Basis:
    """Nominal figures of one coil, and how surely each is known. Recorded with the coil, so its names stay.

    `bobbin` and `lay` are keys: coils with the same one share that unknown. `style` is the same for the kind
    of lay, empty where the recipe states its packing. Relative standard deviations end in `_rel`: those of
    perimeter and growth are what coils of a kind have in common, `mould_rel` and `bed_rel` how one of them
    differs from the next besides. Resistances are at 20 degrees C.
    """

    bobbin: str
    lay: str
    style: str
    wire: str  # for people
    ohm_per_m: float
    ohm_per_m_rel: float
    overall_mm: float
    overall_rel: float
    perimeter_mm: float
    perimeter_rel: float
    mould_rel: float
    build_per_turn_mm: float
    crown: float
    growth_rel: float  # packing and crown; the wire's thickness comes besides
    bed_rel: float

    @property
    def coil(self) -> BuildUp:
        """The nominal coil."""
        return BuildUp(self.perimeter_mm, self.build_per_turn_mm, self.crown)

    @property
    def ohm_per_turn(self) -> float:
        """Of the first turn."""
        return self.ohm_per_m * self.perimeter_mm / 1000.0

    def wire_sizes(self, level: float = 0.0, area: float = 0.0) -> tuple[float, float]:
        """Bare and overall diameter, mm, of a wire whose ohm per metre and cross-section with enamel deviate
        so much: the copper is as thick as its ohm per metre says."""
        return bare_mm_for(self.ohm_per_m * exp(level)), self.overall_mm * exp(area / 2.0)

    @property
    def growth_ohm(self) -> float:
        """By how much a turn has more than the one before."""
        return self.ohm_per_m * 2.0 * pi * self.build_per_turn_mm * self.crown / 1000.0
