"""Lots of coils from one spool that grow by their own laws, for judging what is learnt from them.

Of a spool: ohm per metre (drawn, walking and sloping with every metre) and overall diameter. Of a lot: how
densely the lay packs, the crown, and the bench's meter and thermometer. Of a coil: its core, its stretch, its
packing around the lot's and how that drifts, its warmth and leads. Distributions: `Lots`.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from math import pi, sqrt

import numpy as np
from numpy.typing import NDArray

from tests.forecast.truth import (
    ALPHA,
    CORE_M,
    DEFAULT,
    GAP_MM,
    OHM_PER_M,
    OVERALL_MM,
    Coil,
    Instruments,
)
from windctl.coil.buildup import build_per_turn_mm
from windctl.plan.experience.basis import Basis
from windctl.plan.experience.lesson import Lesson, Measured, Resistance
from windctl.plan.experience.unknowns import meter_rel

Floats = NDArray[np.float64]
TURNS = 8000


@dataclass(frozen=True)
class Lots:
    """From what lots are drawn. Uniform where a pair is given, normal where a standard deviation is."""

    wire_sd: float = 0.04  # relative, cut at twice that
    wire_walk: float = 0.0015  # per square root of a kilometre
    wire_slope: tuple[float, float] = (-0.003, 0.003)  # per kilometre
    overall_mm: tuple[float, float] = OVERALL_MM
    packing: tuple[float, float] = (0.54, 0.72)
    packing_sd: float = 0.03  # between coils of one lot
    packing_trend: tuple[float, float] = (-0.05, 0.05)
    crown: tuple[float, float] = (1.00, 1.12)
    core_sd: float = 0.005
    stretch: tuple[float, float] = (0.0, 0.008)


@dataclass(frozen=True)
class OfLot:
    """One coil of a lot: what it is, the wire that it took, m and g, its mean build, mm, and its crown."""

    coil: Coil
    metres: float
    grams: float
    build_mm: float
    crown: float

    @property
    def ohm(self) -> float:
        """True finished resistance at 20 degrees C."""
        return float(self.coil.ohm[TURNS])


def lot(seed: int, coils: int, laws: Lots = Lots(), meter: Instruments = DEFAULT) -> Iterator[OfLot]:
    """The coils of one lot, one after the other from one spool."""
    rng = np.random.default_rng([51, seed])
    wire = float("inf")
    while abs(wire) > 2.0:
        wire = float(rng.standard_normal())
    level, slope = 1.0 + laws.wire_sd * wire, rng.uniform(*laws.wire_slope)
    overall, crown = rng.uniform(*laws.overall_mm), rng.uniform(*laws.crown)
    packing = rng.uniform(*laws.packing)
    gain = meter.gain_sd * float(rng.standard_normal())
    bias = meter.celsius_sd * float(rng.standard_normal())
    n = np.arange(TURNS)
    for _ in range(coils):
        own_packing = packing * (1.0 + laws.packing_sd * float(rng.standard_normal()))
        own_packing = own_packing * (1.0 + rng.uniform(*laws.packing_trend) * (2.0 * n / TURNS - 1.0))
        build = np.cumsum(pi / 4.0 * overall**2 / (own_packing * GAP_MM))
        core = CORE_M * (1.0 + laws.core_sd * float(rng.standard_normal()))
        length = core + 2e-3 * pi * crown * build
        stretch = 1.0 + rng.uniform(*laws.stretch)
        km = float(length.sum()) / 1000.0
        steps = rng.standard_normal(TURNS) * laws.wire_walk * sqrt(km / TURNS) + slope * km / TURNS
        ohm_per_m = OHM_PER_M * (level + np.cumsum(steps)) * stretch
        start, level = level, level + float(steps.sum())
        copper = 8.89 / 58.0 / (OHM_PER_M * level)
        coat = 1.2 * (pi / 4.0 * overall**2 - 1.0 / 58.0 / (OHM_PER_M * level))
        yield OfLot(
            Coil(
                ohm=np.concatenate([[0.0], np.cumsum(ohm_per_m * length)]),
                wire=start,
                rng=rng,
                meter=meter,
                gain=gain,
                bias=bias,
                over=meter.over_air_k + meter.over_air_sd * float(rng.standard_normal()),
                lead=meter.lead_ohm + meter.lead_sd * float(rng.standard_normal()),
            ),
            metres=1000.0 * km,
            grams=1000.0 * km * (copper + coat) / stretch,
            build_mm=float(build[-1]),
            crown=crown,
        )


def basis(ohm_per_m_rel: float = 0.04) -> Basis:
    """What a plan believes of such a coil: the middle of each range."""
    overall = sum(OVERALL_MM) / 2.0
    packing, crown = 0.63, 1.06
    return Basis(
        bobbin="demo bobbin", lay="demo lay", style="scatter", wire="AWG 42, grade 1",
        ohm_per_m=OHM_PER_M * 1.004, ohm_per_m_rel=ohm_per_m_rel,
        overall_mm=overall, overall_rel=(OVERALL_MM[1] - OVERALL_MM[0]) / 4.0 / overall,
        perimeter_mm=1000.0 * CORE_M, perimeter_rel=0.003, mould_rel=0.004,
        build_per_turn_mm=build_per_turn_mm(overall, packing, GAP_MM), crown=crown,
        growth_rel=0.06 / packing, bed_rel=0.035,
    )  # fmt: skip


def settled(one: OfLot) -> Resistance:
    """The resistance at rest, still warm, as the bench's meter and thermometer have it."""
    meter = one.coil.meter
    reading = one.coil.readings(np.array([float(TURNS)]), resting=True)[0]
    leads = meter.lead_ohm + meter.contact_m * OHM_PER_M
    ohm = (reading.ohm - leads) / (1.0 + ALPHA * (reading.celsius + meter.over_air_k - 20.0))
    own = (meter.noise, meter.floor_ohm / ohm, meter.lead_sd / ohm, ALPHA * meter.over_air_sd)
    return Resistance(ohm, sqrt(sum(part**2 for part in own)))


def lesson(number: int, measured: tuple[Measured, ...], meter: Instruments, based: Basis) -> Lesson:
    """The lesson of a lot's coil of this number."""
    common = meter_rel(meter.gain_sd, meter.celsius_sd, meter.over_air_sd)
    return Lesson(f"d1-2026-{number:04d}", "d1", "s1", based, float(TURNS), common, measured)
