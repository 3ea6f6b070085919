"""How a coil grows: length, resistance and build from the number of turns.

Round a convex core of perimeter P0 a turn that lies at build b is P0 + 2 * pi * b long, exactly. Wire of
enamelled cross-section a fills a gap h with packing phi, so the mean build grows by c = a / (phi * h)
per turn. Where the lay puts wire with density f along the gap (its integral is 1), a place of density f
grows h * f times as fast and takes h * f times as many of the turns: summed over the gap the growth
counts k = h * integral(f^2) times, the crown factor. So n turns take P0 * n + pi * c * k * n^2 of wire.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

_MM_PER_M = 1000.0


@dataclass(frozen=True, slots=True)
class BuildUp:
    """perimeter_mm: P0. build_per_turn_mm: c. crown: k, 1 for a flat lay."""

    perimeter_mm: float
    build_per_turn_mm: float
    crown: float = 1.0

    def build_mm(self, turns: float) -> float:
        """Mean build over the gap, mm."""
        return self.build_per_turn_mm * turns

    def wire_length_m(self, turns: float) -> float:
        """Wire on the bobbin, m."""
        growth = math.pi * self.build_per_turn_mm * self.crown
        return (self.perimeter_mm + growth * turns) * turns / _MM_PER_M

    def mean_turn_mm(self, turns: float) -> float:
        """Mean length of a turn, mm; of no turns, the core's perimeter."""
        return self.perimeter_mm + math.pi * self.build_per_turn_mm * self.crown * turns

    def metres_per_turn(self, turns: float) -> float:
        """Wire that the next turn takes, m: the derivative of the length."""
        return (self.perimeter_mm + 2 * math.pi * self.build_per_turn_mm * self.crown * turns) / _MM_PER_M

    def turns_for_length(self, length_m: float) -> float:
        """Turns that take `length_m` of wire: the inverse of `wire_length_m`.

        The quadratic's root in the form that loses no digits where the build hardly matters.
        """
        length = length_m * _MM_PER_M
        growth = math.pi * self.build_per_turn_mm * self.crown
        return 2 * length / (self.perimeter_mm + math.sqrt(self.perimeter_mm**2 + 4 * growth * length))


def build_per_turn_mm(overall_mm: float, packing: float, gap_mm: float) -> float:
    """c: by how much one turn of wire of this overall diameter raises the mean build, mm."""
    return math.pi / 4 * overall_mm**2 / (packing * gap_mm)


def resistance_ohm(length_m: float, ohm_per_m: float) -> float:
    """Resistance of the wire, at the temperature that ohm_per_m is for."""
    return length_m * ohm_per_m
