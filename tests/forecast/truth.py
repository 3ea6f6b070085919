"""Coils that grow by their own laws, for judging the forecast: richer than the model it uses.

Turn by turn: the wire's ohm per metre is drawn, walks and slopes along the spool; the packing is drawn
and drifts through the coil; the enamel's diameter, the crown, the core and the stretch are drawn; the
coil warms while it turns. The meter has a gain, an offset and noise, the thermometer a bias, the contact
bounces. Distributions: see `Truth`. Some are of other shapes than the model can have (`SHAPES`), others
drift by more than it is told (`drifting`), or are read through noise that lasts (`PINK`, `PERIODIC`).
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from math import log, pi, sqrt

import numpy as np
from numpy.typing import NDArray

from windctl.forecast.reading import Reading
from windctl.plan.beliefs import PACKING_DRIFT_REL
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
    # shapes that the model does not know
    wire_tails: int = (
        0  # Student's t of so many degrees of freedom, scaled to wire_sd and cut at three times it
    )
    packing_settles: float = 0.0  # by up to so much either way, over the first sixth of the coil
    packing_waves: float = 0.0  # amplitude; a wave lasts a tenth to four tenths of the coil
    layers: float = 0.0  # amplitude of the turn's length; a layer is a fiftieth to a sixteenth of the coil


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
    lasts: tuple[float, ...] = ()  # turns: noise of turning readings is a sum of parts that last so long
    waves: tuple[float, float] = (
        0.0,
        0.0,
    )  # turns: noise of turning readings is mostly a wave of such a period
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
PINK = replace(FINE, lasts=(10.0, 30.0, 100.0, 300.0, 1000.0))  # the same power in each half decade
PERIODIC = replace(FINE, waves=(200.0, 800.0))


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
        for turn, own in zip(turns, self._own_noise(turns, resting), strict=True):
            air = 22.0 + 1.5 * turn / TURNS + 0.05 * float(rng.standard_normal())
            over = 0.0 if cold else self.over_air(turn)
            true = self.ohm[int(turn)]
            raw = (1.0 + self.gain) * (
                true * (1.0 + ALPHA * (air + over - 20.0)) + self.lead + meter.contact_m * OHM_PER_M
            )
            ohm = raw * (1.0 + own) + meter.floor_ohm * float(rng.standard_normal()) if noisy else raw
            if rng.random() < meter.bounce:
                ohm = bounced(rng, ohm)
            taken.append(
                Reading(
                    float(turn), float(ohm), air + self.bias, resting=resting, warmth=0.0 if cold else 1.0
                )
            )
        return taken

    def _own_noise(self, turns: Floats, resting: bool) -> Floats:
        """Relative noise of one reading after the other, as the instruments have it."""
        rng, meter, number = self.rng, self.meter, len(turns)
        if resting:
            return meter.noise * rng.standard_normal(number)
        if meter.waves[1] > 0.0:
            period, phase = rng.uniform(*meter.waves), rng.random()
            wave = np.sin(2.0 * pi * (turns / period + phase))
            return meter.turning_noise * (1.2 * wave + 0.5 * rng.standard_normal(number))
        kept = [np.full(number, meter.alike)]
        if meter.lasts:
            gaps = np.diff(turns, prepend=0.0)
            kept = [np.exp(-gaps / long) for long in meter.lasts]
        noise = np.zeros(number)
        for part in kept:
            fresh, now = rng.standard_normal(number), float(rng.standard_normal())
            for i in range(number):
                now = part[i] * now + sqrt(1.0 - part[i] ** 2) * fresh[i]
                noise[i] += now
        return meter.turning_noise * noise / sqrt(len(kept))


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
    while abs(wire) > (3.0 if truth.wire_tails else 2.0):
        tails = truth.wire_tails
        wire = (
            float(rng.standard_t(tails)) / sqrt(tails / (tails - 2))
            if tails
            else float(rng.standard_normal())
        )
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
    if truth.packing_settles:
        packing *= 1.0 + truth.packing_settles * rng.uniform(-1.0, 1.0) * (1.0 - np.exp(-6.0 * n / TURNS))
    if truth.packing_waves:
        packing *= 1.0 + truth.packing_waves * _wave(rng, n, 0.1, 0.4)
    build = np.cumsum(area / (packing * GAP_MM))
    core = CORE_M * (1.0 + truth.core_sd * float(rng.standard_normal()))
    length = core + 2e-3 * pi * rng.uniform(*truth.crown) * build
    if truth.layers:
        length *= 1.0 + truth.layers * _wave(rng, n, 1 / 50, 1 / 16)
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


def _wave(rng: np.random.Generator, n: NDArray[np.int64], least: float, most: float) -> Floats:
    """A sine of a period between these parts of the coil."""
    return np.asarray(np.sin(2.0 * pi * (n / (TURNS * rng.uniform(least, most)) + rng.random())))


SHAPES = Truth(wire_tails=4, packing_settles=0.07, packing_waves=0.03, layers=0.0015)


def drifting(times: float, truth: Truth = Truth()) -> Truth:
    """The same, but whatever changes along the coil does so `times` as much."""
    return replace(
        truth,
        wire_walk=times * truth.wire_walk,
        wire_slope=(times * truth.wire_slope[0], times * truth.wire_slope[1]),
        packing_trend=(times * truth.packing_trend[0], times * truth.packing_trend[1]),
    )


def prior_for(truth: Truth = Truth(), meter: Instruments = DEFAULT, turns: float = TURNS) -> Prior:
    """What a plan would believe about these coils: means and standard deviations, nothing of the shapes.

    The growth goes with overall^2 * crown / packing, three independent uniforms: its moments are exact.
    """
    wire_sd = truth.wire_sd * sqrt(_CUT_AT_TWO)
    stretch, stretch_var = _moments(1, *truth.stretch)
    thick, thick_var = _moments(2, *truth.overall_mm)
    loose, loose_var = _moments(-1, *truth.packing)
    crown, crown_var = _moments(1, *truth.crown)
    common = (1.0 + wire_sd**2) * (1.0 + stretch_var / (1.0 + stretch) ** 2) - 1.0
    own = 1.0
    for mean, var in ((thick, thick_var), (loose, loose_var), (crown, crown_var)):
        own *= 1.0 + var / mean**2
    ohm_per_m = OHM_PER_M * (1.0 + stretch)
    per_turn = ohm_per_m * CORE_M
    growth = 2e-3 * pi * (pi / 4.0 * thick * loose / GAP_MM) * crown * ohm_per_m
    km = (per_turn * turns + growth * turns**2 / 2.0) / ohm_per_m / 1000.0
    return Prior(
        ohm_per_turn=per_turn,
        growth=growth,
        var_ohm_per_turn=((1.0 + common) * (1.0 + truth.core_sd**2) - 1.0) * per_turn**2,
        var_growth=((1.0 + common) * own - 1.0) * growth**2,
        cov=common * per_turn * growth,
        growth_walk_rel=PACKING_DRIFT_REL,
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
        wire_walk_rel=truth.wire_walk * sqrt(km),
        wire_slope_rel=(truth.wire_slope[1] - truth.wire_slope[0]) / sqrt(12.0) * km,
    )


_CUT_AT_TWO = 0.7737413  # variance of a standard normal between -2 and 2: 1 - 4*phi(2)/(2*Phi(2) - 1)


def _moments(power: int, low: float, high: float) -> tuple[float, float]:
    """Mean and variance of a power of a figure that is anywhere between two others."""
    if low == high:
        return low**power, 0.0

    def mean(p: int) -> float:
        return (
            log(high / low) / (high - low)
            if p == -1
            else (high ** (p + 1) - low ** (p + 1)) / (p + 1) / (high - low)
        )

    return mean(power), mean(2 * power) - mean(power) ** 2


def with_bounce(meter: Instruments, part: float = 0.02) -> Instruments:
    """The same instruments behind a contact that bounces."""
    return replace(meter, bounce=part)
