"""What is believed of a coil before its first turn, how surely, and how that makes the forecast's prior."""

from __future__ import annotations

import math
from dataclasses import dataclass

from windctl.coil.buildup import BuildUp
from windctl.material.wire import Wire
from windctl.plan.prior import Prior
from windctl.profile.model import Readings
from windctl.recipe.model import Recipe

# Enamelled wire area over window area where nobody has measured it: mean and standard deviation. Common
# practice, no source; random loose packing of disks is about 0.66 (Brouwers, Soft Matter 2023), square
# packing 0.785.
PACKING = {"scatter": (0.63, 0.06), "even": (0.74, 0.05)}

# A recipe outlives the spool that its ohm per metre was measured on. Without a stated uncertainty the
# next spool may differ by several per cent: from spool to spool +-8 % are the limits for fine wire, read
# as two standard deviations.
_ANOTHER_SPOOL_REL = 0.04

_STRETCH_REL = 0.002  # ohm per wound metre rises by about the wire's stretch in winding. Our judgement
_PERIMETER_REL = 0.004  # of a core known from its drawing, tape and corners included. Our judgement
_MEASURED_PERIMETER_REL = 0.0015  # 20 wrapped turns against a rule: 2 to 4 mm in 2.4 m. Our judgement
# What slides takes away from what the crown factor has above 1. How steep a scatter stands is foreseen only
# within 35 to 60 degrees; an even lay is foreseen to hold, and may slide all the same. The share is one
# standard deviation. Our judgement.
_CROWN_REL = 0.01
_CROWN_SLIDES = {"scatter": 0.4, "even": 0.6}
_PACKING_DRIFT_REL = 0.05  # of the growth over a coil, as the packing loosens. Our judgement


@dataclass(frozen=True, slots=True)
class Beliefs:
    """Means and independent standard deviations (rel: relative) of what decides a coil's resistance."""

    ohm_per_m: float
    ohm_per_m_rel: float
    perimeter_rel: float
    packing: float
    packing_sd: float
    overall_rel: float
    crown_slides: float

    @property
    def build_rel(self) -> float:
        """Of the build per turn: it goes with the wire's area over the packing."""
        return math.hypot(2 * self.overall_rel, self.packing_sd / self.packing)

    def growth_rel(self, crown: float) -> float:
        """Of what the build adds to the length: build per turn and crown factor."""
        return math.hypot(self.build_rel, _CROWN_REL + self.crown_slides * (crown - 1) / crown)


def beliefs_of(recipe: Recipe, wire: Wire) -> Beliefs:
    """From the recipe where it says so, else the prior of the lay's style and the wire's tables."""
    lay = recipe.lay
    packing, packing_sd = PACKING[lay.style]
    if lay.packing is not None:
        packing = lay.packing
        packing_sd = lay.packing_sd if lay.packing_sd is not None else packing_sd
    ohm_rel = wire.ohm_per_m_sd / wire.ohm_per_m
    if recipe.wire.ohm_per_m_sd is None:
        ohm_rel = max(ohm_rel, _ANOTHER_SPOOL_REL)
    measured = recipe.bobbin.core_perimeter_mm is not None
    return Beliefs(
        ohm_per_m=wire.ohm_per_m,
        ohm_per_m_rel=math.hypot(ohm_rel, _STRETCH_REL),
        perimeter_rel=_MEASURED_PERIMETER_REL if measured else _PERIMETER_REL,
        packing=packing,
        packing_sd=packing_sd,
        overall_rel=wire.overall_sd_mm / wire.overall_mm,
        crown_slides=_CROWN_SLIDES[lay.style],
    )


def resistance_sd_ohm(beliefs: Beliefs, coil: BuildUp, turns: float) -> float:
    """Standard deviation of the resistance at 20 degrees C of `turns` turns, ohm.

    Ohm per metre scales all of it, the perimeter what lies at the core, build and crown what the growth adds.
    """
    core = beliefs.ohm_per_m * coil.perimeter_mm * turns / 1000
    whole = beliefs.ohm_per_m * coil.wire_length_m(turns)
    return math.hypot(
        whole * beliefs.ohm_per_m_rel,
        core * beliefs.perimeter_rel,
        (whole - core) * beliefs.growth_rel(coil.crown),
    )


def prior_of(beliefs: Beliefs, coil: BuildUp, turns: float, readings: Readings) -> Prior:
    """The forecast's prior. Ohm per metre is in both coefficients, so they go up and down together."""
    per_turn = beliefs.ohm_per_m * coil.perimeter_mm / 1000
    growth = beliefs.ohm_per_m * 2 * math.pi * coil.build_per_turn_mm * coil.crown / 1000
    rho = beliefs.ohm_per_m_rel**2
    return Prior(
        ohm_per_turn=per_turn,
        growth=growth,
        var_ohm_per_turn=per_turn**2 * (rho + beliefs.perimeter_rel**2),
        var_growth=growth**2 * (rho + beliefs.growth_rel(coil.crown) ** 2),
        cov=per_turn * growth * rho,
        growth_walk_rel=_PACKING_DRIFT_REL,
        turns=turns,
        offset_ohm=readings.lead_ohm,
        offset_sd=readings.lead_sd_ohm,
        gain_sd=readings.gain_sd_pct / 100,
        celsius_sd=readings.celsius_sd,
        coil_over_air_k=readings.coil_over_air_k,
        coil_over_air_sd=readings.coil_over_air_sd_k,
        noise_rel=readings.noise_pct / 100,
        floor_ohm=readings.floor_ohm,
        contact_length_ohm=beliefs.ohm_per_m * readings.contact_length_mm / 1000,
    )
