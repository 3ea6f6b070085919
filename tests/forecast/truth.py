"""Coils that grow by their own laws, for judging the forecast: richer than the model it uses.

Turn by turn: the wire's ohm per metre is drawn, walks and slopes along the spool; the packing is drawn
and drifts through the coil; the enamel's diameter, the crown, the core and the stretch are drawn; the
coil warms while it turns. The meter has a gain, an offset and noise, the thermometer a bias, the contact
bounces. Distributions: see `Truth`.
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from math import pi, sqrt

import numpy as np
from numpy.typing import NDArray

from windctl.forecast.reading import Reading
from windctl.plan.prior import Prior

Floats = NDArray[np.float64]
ALPHA = 0.00393  # 1/K, IEC 60028
OHM_PER_M = 5.4716  # AWG 42 by the gauge law at 1/58 ohm mm2/m
CORE_M = 0.1300  # round the core
GAP_MM = 11.0
OVERALL_MM = (0.0693, 0.0763)  # grade 1 of 0.0633 mm, interpolated in the table of IEC 60317-0-1
TURNS = 8000


@dataclass(frozen=True)
class Truth:
    """From what the coils are drawn. Uniform where a pair is given, normal where a standard deviation is."""

    wire_sd: float = 0.04  # relative, cut at twice that
    wire_walk: float = 0.0015  # per square root of a kilometre
    wire_slope: tuple[float, float] = (-0.003, 0.003)  # per kilometre
    overall_mm: tuple[float, float] = OVERALL_MM
    packing: tuple[float, float] = (0.54, 0.72)
    packing_trend: tuple[float, float] = (-0.05, 0.05)  # from the middle to the end, relative
    crown: tuple[float, float] = (1.00, 1.12)
    core_sd: float = 0.005
    stretch: tuple[float, float] = (0.0, 0.008)
    gauge_factor: float = 1.0  # ohm per metre of the wire on the spool over the recipe's


@dataclass(frozen=True)
class Instruments:
    """What the readings are off by. `gain_sd` and the noises are relative."""

    gain_sd: float = 0.003
    celsius_sd: float = 0.5
    over_air_k: float = 0.7
    over_air_sd: float = 0.7
    noise: float = 0.001
    turning_noise: float = 0.001
    alike: float = 0.0  # correlation of one turning reading's noise with the next one's
    floor_ohm: float = 0.2
    lead_ohm: float = 0.5
    lead_sd: float = 0.3
    contact_m: float = 0.15
    bounce: float = 0.0  # part of the readings that the contact spoils


DEFAULT = Instruments()
FINE = Instruments(
    gain_sd=0.0002,
    celsius_sd=0.05,
    over_air_k=0.0,
    over_air_sd=0.0,
    noise=0.0005,
    turning_noise=0.001,
    floor_ohm=0.05,
    lead_sd=0.1,
)


@dataclass(frozen=True)
class Coil:
    """One coil of `TURNS` turns and more: `ohm[n]` is its true resistance at 20 degrees C after n turns."""

    ohm: Floats
    wire: float  # its ohm per metre over the nominal one, where the coil starts
    rng: np.random.Generator = field(repr=False)
    meter: Instruments
    gain: float
    bias: float
    over: float
    lead: float

    def over_air(self, turn: float) -> float:
        """The coil warms up over the first third of the winding."""
        return self.over * (1.0 - float(np.exp(-3.0 * turn / TURNS)))

    def readings(
        self, turns: Floats, *, resting: bool = False, cold: bool = False, noisy: bool = True
    ) -> list[Reading]:
        """Raw readings at these turns, bounce and all."""
        rng, meter = self.rng, self.meter
        taken = []
        colour = float(rng.standard_normal())
        for turn in turns:
            air = 22.0 + 1.5 * turn / TURNS + 0.05 * float(rng.standard_normal())
            over = 0.0 if cold else self.over_air(turn)
            true = self.ohm[int(turn)]
            raw = (1.0 + self.gain) * (
                true * (1.0 + ALPHA * (air + over - 20.0)) + self.lead + meter.contact_m * OHM_PER_M
            )
            fresh = float(rng.standard_normal())
            colour = meter.alike * colour + sqrt(1.0 - meter.alike**2) * fresh
            relative = meter.noise * fresh if resting else meter.turning_noise * colour
            ohm = raw * (1.0 + relative) + meter.floor_ohm * float(rng.standard_normal()) if noisy else raw
            if rng.random() < meter.bounce:
                ohm = bounced(rng, ohm)
            taken.append(
                Reading(
                    float(turn), float(ohm), air + self.bias, resting=resting, warmth=0.0 if cold else 1.0
                )
            )
        return taken


def bounced(rng: np.random.Generator, ohm: float) -> float:
    """A contact that left the wire: open, nothing, up to 30 % more or 40 % less, each as often."""
    kind = rng.integers(4)
    if kind == 0:
        return float("inf")
    if kind == 1:
        return 0.0
    return ohm * (1.0 + rng.uniform(0.02, 0.30)) if kind == 2 else ohm * (1.0 - rng.uniform(0.02, 0.40))


def draw(seed: int, truth: Truth = Truth(), meter: Instruments = DEFAULT, turns: int = TURNS + 1200) -> Coil:
    """The coil of this seed."""
    rng = np.random.default_rng([20, seed])
    wire = float("inf")
    while abs(wire) > 2.0:
        wire = float(rng.standard_normal())
    wire = (1.0 + truth.wire_sd * wire) * truth.gauge_factor
    n = np.arange(turns)
    km = CORE_M * 1.1e-3
    walk = (
        np.cumsum(rng.standard_normal(turns)) * truth.wire_walk * sqrt(km)
        + rng.uniform(*truth.wire_slope) * km * n
    )
    ohm_per_m = OHM_PER_M * wire * (1.0 + walk) * (1.0 + rng.uniform(*truth.stretch))
    area = pi / 4.0 * rng.uniform(*truth.overall_mm) ** 2 / sqrt(truth.gauge_factor)
    packing = rng.uniform(*truth.packing) * (
        1.0 + rng.uniform(*truth.packing_trend) * (2.0 * n / TURNS - 1.0)
    )
    build = np.cumsum(area / (packing * GAP_MM))
    core = CORE_M * (1.0 + truth.core_sd * float(rng.standard_normal()))
    length = core + 2e-3 * pi * rng.uniform(*truth.crown) * build
    ohm = np.concatenate([[0.0], np.cumsum(ohm_per_m * length)])
    return Coil(
        ohm=ohm,
        wire=wire,
        rng=rng,
        meter=meter,
        gain=meter.gain_sd * float(rng.standard_normal()),
        bias=meter.celsius_sd * float(rng.standard_normal()),
        over=meter.over_air_k + meter.over_air_sd * float(rng.standard_normal()),
        lead=meter.lead_ohm + meter.lead_sd * float(rng.standard_normal()),
    )


def prior_for(truth: Truth = Truth(), meter: Instruments = DEFAULT, turns: float = TURNS) -> Prior:
    """What a plan would believe about these coils: means and standard deviations, nothing of the shapes."""
    stretch = sum(truth.stretch) / 2.0
    stretch_sd = (truth.stretch[1] - truth.stretch[0]) / sqrt(12.0)
    overall = sum(truth.overall_mm) / 2.0
    overall_rel = (truth.overall_mm[1] - truth.overall_mm[0]) / sqrt(12.0) / overall
    packing = sum(truth.packing) / 2.0
    packing_rel = (truth.packing[1] - truth.packing[0]) / sqrt(12.0) / packing
    crown = sum(truth.crown) / 2.0
    crown_rel = (truth.crown[1] - truth.crown[0]) / sqrt(12.0) / crown
    ohm_per_m = OHM_PER_M * (1.0 + stretch)
    per_turn = ohm_per_m * CORE_M
    growth = 2e-3 * pi * (pi / 4.0 * overall**2 / (packing * GAP_MM)) * crown * ohm_per_m
    common = truth.wire_sd**2 + stretch_sd**2
    return Prior(
        ohm_per_turn=per_turn,
        growth=growth,
        var_ohm_per_turn=(common + truth.core_sd**2) * per_turn**2,
        var_growth=(common + packing_rel**2 + crown_rel**2 + (2.0 * overall_rel) ** 2) * growth**2,
        cov=common * per_turn * growth,
        growth_walk_rel=0.05,
        turns=turns,
        offset_ohm=meter.lead_ohm,
        offset_sd=meter.lead_sd,
        gain_sd=meter.gain_sd,
        celsius_sd=meter.celsius_sd,
        coil_over_air_k=meter.over_air_k,
        coil_over_air_sd=meter.over_air_sd,
        noise_rel=meter.noise,
        floor_ohm=meter.floor_ohm,
        contact_length_ohm=meter.contact_m * OHM_PER_M,
    )


def with_bounce(meter: Instruments, part: float = 0.02) -> Instruments:
    """The same instruments behind a contact that bounces."""
    return replace(meter, bounce=part)
