"""Enamel: how much thicker it makes the wire, and what it weighs."""

from __future__ import annotations

from typing import Literal

from windctl.material.gauge import METRIC, interpolate

Grade = Literal["grade 1", "grade 2"]

# Polyurethane and polyvinyl acetal films lie between about 1.1 and 1.3 g/cm3 (from memory). Enamel is some
# 4 % of a fine wire's mass, so the choice within that range moves the mass by less than 0.5 %.
DENSITY_G_CM3 = 1.2

# A gauge size may lie a little beside the table: AWG 38 is 0.7 % thicker than its last row.
_SLACK = 0.02


def increase_mm(bare_mm: float, grade: Grade) -> tuple[float, float]:
    """Least and greatest increase of the diameter by the enamel, mm.

    The metric table's overall limits less the nominal, interpolated over the bare diameter; at a metric size
    that is the table's own row. ValueError outside the table: then the wire must be measured.
    """
    finest, coarsest = METRIC[0].bare_mm, METRIC[-1].bare_mm
    if not finest * (1 - _SLACK) <= bare_mm <= coarsest * (1 + _SLACK):
        raise ValueError(
            f"no enamel range is known for {bare_mm:.4f} mm bare, only for {finest:g} to {coarsest:g} mm; "
            "measure the wire and give wire.overall_mm"
        )
    bares = [size.bare_mm for size in METRIC]
    overalls = [size.grade1_mm if grade == "grade 1" else size.grade2_mm for size in METRIC]
    least, greatest = (
        interpolate(
            bare_mm, bares, [overall[end] - bare for bare, overall in zip(bares, overalls, strict=True)]
        )
        for end in (0, 1)
    )
    return least, greatest
