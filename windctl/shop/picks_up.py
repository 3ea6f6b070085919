"""What one recorded coil encloses and picks up, from its own record alone.

Its count, its core as drawn, what was foreseen of its build when it was begun, with all that earlier coils
had taught by then, and what was measured of it: the same whenever it is asked, whatever was wound since.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass, replace
from math import sqrt

from windctl.coil.geometry import Core
from windctl.plan.experience.basis import Basis
from windctl.plan.experience.fold import Experience
from windctl.plan.experience.lesson import Lesson
from windctl.plan.prior import Prior
from windctl.record.addenda import Addendum, CoilMeasured, CoilTaught
from windctl.shop.enclosed import Enclosed, Known, enclosed
from windctl.shop.hum import MAINS_HZ, hum_volt


@dataclass(frozen=True, slots=True)
class PicksUp:
    """turns_area_m2: N*A; rel: its relative standard deviation."""

    turns_area_m2: float
    rel: float

    def volt(self, hz: float) -> float:
        """In a uniform field of one microtesla along its axis, without steel."""
        return hum_volt(self.turns_area_m2, hz)

    def as_json(self) -> dict[str, float]:
        """For other programs: m2, and volts per microtesla."""
        volts = {f"hum_v_per_ut_{hz:.0f}hz": self.volt(hz) for hz in MAINS_HZ}
        sd = self.turns_area_m2 * self.rel
        return {"turns_area_m2": self.turns_area_m2, "turns_area_sd_m2": sd, **volts}


def one_of(told: Enclosed, at: int) -> PicksUp:
    """One of several coils that were told together."""
    return PicksUp(told.turns_area_m2(at), told.rel(at))


def recorded(core: Core | None, addenda: Iterable[Addendum], prior: Prior) -> PicksUp | None:
    """Of a finished coil, begun with this prior, from what was said since; None where its record has taught
    nothing, or has no core that can be read."""
    said = tuple(addenda)
    lessons = [fact.lesson for fact in said if isinstance(fact, CoilTaught)]
    if core is None or not lessons or not lessons[-1].turns > 0:
        return None
    by_hand = tuple(one for fact in said if isinstance(fact, CoilMeasured) for one in fact.measured)
    return picks_up(core, replace(lessons[-1], measured=(*lessons[-1].measured, *by_hand)), prior)


def picks_up(core: Core, lesson: Lesson, prior: Prior) -> PicksUp:
    """The coil of this lesson, begun with this prior."""
    foreseen = replace(lesson, basis=foreseen_by(prior, lesson.basis))
    return one_of(enclosed([Known(core, foreseen)], [foreseen], Experience()), 0)


def foreseen_by(prior: Prior, basis: Basis) -> Basis:
    """A coil's basis with what its prior says in place of tables and usual packing: R = r*n + g*n^2/2, so the
    growth that the length shows is g/r * P0/(2*pi) per turn; how far wire and growth may be off goes with it.
    """
    flat = prior.var_ohm_per_turn / prior.ohm_per_turn**2
    grown = prior.var_growth / prior.growth**2
    common = max(prior.cov / (prior.ohm_per_turn * prior.growth), 0.0)
    core = basis.perimeter_rel**2 + basis.mould_rel**2
    growth = flat + grown - 2 * common - core - basis.bed_rel**2
    per_turn = prior.growth / prior.ohm_per_turn * basis.perimeter_mm / (2 * math.pi)
    return replace(
        basis,
        style="",
        ohm_per_m=prior.ohm_per_turn / basis.perimeter_mm * 1000.0,
        ohm_per_m_rel=sqrt(common),
        overall_rel=0.0,  # in the growth
        build_per_turn_mm=per_turn / basis.crown,
        growth_rel=sqrt(max(growth, 0.0)),
    )
