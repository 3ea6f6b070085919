"""What is known -> what the next coil will be: its wire, its core and its growth, with their covariance."""

from __future__ import annotations

from dataclasses import dataclass

from windctl.plan.experience.fold import Experience, Known, at_coil
from windctl.plan.experience.lesson import Lesson
from windctl.plan.experience.unknowns import roles


@dataclass(frozen=True, slots=True)
class Outlook:
    """Relative deviations (logarithms) of the next coil from its basis, everything included.

    `wire`: ohm per metre; `core`: perimeter; `growth`: build per turn times crown. `var_flat` is the variance
    of ohm per turn at the core, `var_grown` that of what each turn has more than the one before, `cov` is
    between the two, `var_growth` is of `growth` alone. `packing`: how much more densely the lay packs than
    was believed, the wire's thickness left out. `meter_cov`: of ohm per turn with the meter's error, since
    what was learnt was learnt by this meter.
    """

    wire: float
    core: float
    growth: float
    var_flat: float
    var_grown: float
    cov: float
    var_growth: float
    wire_known: Known
    packing: Known
    meter_cov: float = 0.0
    spool_coils: int = 0
    lay_coils: int = 0


def outlook(experience: Experience, lesson: Lesson) -> Outlook:
    """`lesson`: the coil to come, nothing measured."""
    there = at_coil(experience, lesson)
    belief = there.belief
    part = roles(lesson.basis, lesson.source, lesson.bench)
    wire, core, growth = part.rows()
    flat = {**wire, **core}
    grown = {**wire, **growth}
    bed = {name: 1.0 for name in part.growth if name != part.area}
    level, lay = part.wire[0], ("lay", lesson.basis.lay)
    spool_coils, lay_coils = there.coils.get(level, 0), there.coils.get(lay, 0)
    return Outlook(
        wire=belief.along(wire),
        core=belief.along(core),
        growth=belief.along(growth),
        var_flat=belief.covariance(flat, flat),
        var_grown=belief.covariance(grown, grown),
        cov=belief.covariance(flat, grown),
        var_growth=belief.covariance(growth, growth),
        wire_known=Known(belief.along(wire), belief.covariance(wire, wire) ** 0.5, spool_coils),
        packing=Known(-belief.along(bed), belief.covariance(bed, bed) ** 0.5, lay_coils),
        meter_cov=belief.covariance(flat, {part.meter: 1.0}),
        spool_coils=spool_coils,
        lay_coils=lay_coils,
    )
