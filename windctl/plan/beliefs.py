"""What is believed of a coil before its first turn, how surely, and how that makes the forecast's prior.

First what recipe, tables and the lay's style say; then, where the shop's own coils have taught something,
what they say of it.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from windctl.coil.buildup import BuildUp
from windctl.coil.geometry import Core
from windctl.material.wire import Wire
from windctl.plan.experience.basis import Basis
from windctl.plan.experience.keys import bobbin_key, lay_key
from windctl.plan.experience.outlook import Outlook
from windctl.plan.experience.unknowns import SLOPE_PER_KM, WALK_PER_ROOT_KM
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

_PERIMETER_REL = 0.005  # of a core known from its drawing, tape and corners included. Our judgement
_MEASURED_PERIMETER_REL = 0.0015  # 20 wrapped turns against a rule: 2 to 4 mm in 2.4 m. Our judgement
# What slides takes away from what the crown factor has above 1. How steep a scatter stands is foreseen only
# within 35 to 60 degrees; an even lay is foreseen to hold, and may slide all the same. The share is one
# standard deviation. Our judgement.
_CROWN_REL = 0.01
_CROWN_SLIDES = {"scatter": 0.4, "even": 0.6}
# Of the growth over a coil, as the packing loosens: some 5 %, and a little more because that is a guess. Our
# judgement.
PACKING_DRIFT_REL = 0.055


# How much of that each coil has for itself: one core differs from the next of its kind, one coil packs more
# densely than the next of its lot. Our judgement.
_MOULD_PART = 0.8
_BED_REL = 0.035
_MOST_BED_PART = 0.7


@dataclass(frozen=True, slots=True)
class Beliefs:
    """Means and independent standard deviations (rel: relative) of what decides a coil's resistance, from
    recipe and tables alone."""

    ohm_per_m: float
    ohm_per_m_rel: float
    perimeter_rel: float
    packing: float
    packing_sd: float
    overall_rel: float
    crown_slides: float

    def growth_rel(self, crown: float) -> float:
        """Of what the build adds to the length, the wire's thickness left out: packing and crown factor."""
        return math.hypot(
            self.packing_sd / self.packing, _CROWN_REL + self.crown_slides * (crown - 1) / crown
        )


def beliefs_of(recipe: Recipe, wire: Wire, *, spool_known: bool = False) -> Beliefs:
    """From the recipe where it says so, else the prior of the lay's style and the wire's tables.

    `spool_known`: `wire` is that of a spool in the shop, and not what the recipe once measured.
    """
    lay = recipe.lay
    packing, packing_sd = PACKING[lay.style]
    if lay.packing is not None:
        packing = lay.packing
        packing_sd = lay.packing_sd if lay.packing_sd is not None else packing_sd
    ohm_rel = wire.ohm_per_m_sd / wire.ohm_per_m
    if recipe.wire.ohm_per_m_sd is None or spool_known:
        ohm_rel = max(ohm_rel, _ANOTHER_SPOOL_REL)
    measured = recipe.bobbin.core_perimeter_mm is not None
    return Beliefs(
        ohm_per_m=wire.ohm_per_m,
        ohm_per_m_rel=ohm_rel,
        perimeter_rel=_MEASURED_PERIMETER_REL if measured else _PERIMETER_REL,
        packing=packing,
        packing_sd=packing_sd,
        overall_rel=wire.overall_sd_mm / wire.overall_mm,
        crown_slides=_CROWN_SLIDES[lay.style],
    )


def basis_of(recipe: Recipe, wire: Wire, core: Core, beliefs: Beliefs, coil: BuildUp) -> Basis:
    """The same as a basis for learning: what coils of a kind have in common, and what each has for itself."""
    growth = beliefs.growth_rel(coil.crown)
    bed = min(_BED_REL, _MOST_BED_PART * growth)
    mould = _MOULD_PART * beliefs.perimeter_rel
    return Basis(
        bobbin=bobbin_key(recipe),
        lay=lay_key(recipe),
        style=recipe.lay.style if recipe.lay.packing is None else "",
        wire=wire.label,
        ohm_per_m=beliefs.ohm_per_m,
        ohm_per_m_rel=beliefs.ohm_per_m_rel,
        overall_mm=wire.overall_mm,
        overall_rel=beliefs.overall_rel,
        perimeter_mm=core.perimeter_mm,
        perimeter_rel=math.sqrt(beliefs.perimeter_rel**2 - mould**2),
        mould_rel=mould,
        build_per_turn_mm=coil.build_per_turn_mm,
        crown=coil.crown,
        growth_rel=math.sqrt(growth**2 - bed**2),
        bed_rel=bed,
    )


@dataclass(frozen=True, slots=True)
class Believed:
    """A coil as it is believed to become: its basis, and how it is expected to deviate from it."""

    basis: Basis
    outlook: Outlook

    @property
    def ohm_per_m(self) -> float:
        """Of the wire on the coil, at 20 degrees C."""
        return self.basis.ohm_per_m * math.exp(self.outlook.wire)

    @property
    def coil(self) -> BuildUp:
        """How it grows."""
        basis, outlook = self.basis, self.outlook
        return BuildUp(
            basis.perimeter_mm * math.exp(outlook.core),
            basis.build_per_turn_mm * math.exp(outlook.growth),
            basis.crown,
        )

    @property
    def build_rel(self) -> float:
        """Relative standard deviation of the build."""
        return math.sqrt(self.outlook.var_growth)

    def resistance_sd_ohm(self, turns: float) -> float:
        """Standard deviation of the resistance at 20 degrees C of `turns` turns, ohm."""
        flat = self.ohm_per_m * self.coil.perimeter_mm * turns / 1000
        grown = self.ohm_per_m * self.coil.wire_length_m(turns) - flat
        outlook = self.outlook
        variance = flat**2 * outlook.var_flat + grown**2 * outlook.var_grown + 2 * flat * grown * outlook.cov
        return math.sqrt(variance)

    def prior(self, turns: float, readings: Readings) -> Prior:
        """The forecast's. Ohm per metre is in both coefficients, so they go up and down together."""
        coil, outlook = self.coil, self.outlook
        per_turn = self.ohm_per_m * coil.perimeter_mm / 1000
        km = coil.wire_length_m(turns) / 1000
        growth = self.ohm_per_m * 2 * math.pi * coil.build_per_turn_mm * coil.crown / 1000
        return Prior(
            ohm_per_turn=per_turn,
            growth=growth,
            var_ohm_per_turn=per_turn**2 * outlook.var_flat,
            var_growth=growth**2 * outlook.var_grown,
            cov=per_turn * growth * outlook.cov,
            growth_walk_rel=PACKING_DRIFT_REL,
            turns=turns,
            offset_ohm=readings.lead_ohm,
            offset_sd=readings.lead_sd_ohm,
            gain_sd=readings.gain_sd_pct / 100,
            celsius_sd=readings.celsius_sd,
            coil_over_air_k=readings.coil_over_air_k,
            coil_over_air_sd=readings.coil_over_air_sd_k,
            noise_rel=readings.noise_pct / 100,
            floor_ohm=readings.floor_ohm,
            contact_length_ohm=self.ohm_per_m * readings.contact_length_mm / 1000,
            wire_walk_rel=WALK_PER_ROOT_KM * math.sqrt(km),
            wire_slope_rel=SLOPE_PER_KM * km,
            meter_cov=outlook.meter_cov,
        )
