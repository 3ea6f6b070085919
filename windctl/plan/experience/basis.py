"""What a coil was believed to be before anything was learnt.

The next coil of another bobbin or another spool profits from what this one taught because both are told as
deviations from such a basis: the drawing, the tables, the usual packing.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import exp, pi

from windctl.coil.buildup import BuildUp
from windctl.material.copper import DENSITY_G_CM3 as COPPER_G_CM3

_THINNEST = 0.2  # of the enamel's nominal cross-section: less is no enamel


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
    bare_mm: float
    overall_mm: float
    overall_rel: float
    mass_g_per_m: float
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

    def wire_g_per_m(self, level: float = 0.0, area: float = 0.0) -> float:
        """Mass of a metre of the wound wire, copper and enamel.

        `level`, `area`: by how much its ohm per metre and its cross-section with enamel deviate. Copper goes
        down as ohm per metre goes up.
        """
        copper, bare, overall = self.copper_g_per_m, self.bare_mm**2, self.overall_mm**2
        thick = (overall * exp(area) - bare * exp(-level)) / (overall - bare) if overall > bare else 1.0
        return copper * exp(-level) + (self.mass_g_per_m - copper) * max(thick, _THINNEST)

    @property
    def copper_g_per_m(self) -> float:
        """Mass of a metre's copper."""
        return COPPER_G_CM3 * pi / 4.0 * self.bare_mm**2

    @property
    def growth_ohm(self) -> float:
        """By how much a turn has more than the one before."""
        return self.ohm_per_m * 2.0 * pi * self.build_per_turn_mm * self.crown / 1000.0
