"""The unknowns behind a shop's coils, how far each strays, and how measurements depend on them.

All are relative deviations from a coil's basis:

    level, slope   of a spool: ohm per metre where the wire now leaves it, and its change per km
    area           of a spool: cross-section with enamel
    metal          of a spool: copper's density and resistivity and the enamel's mass, as mass shows them
    core           of a kind of bobbin: perimeter
    style          of scatter or even lays in this shop: build per turn and crown
    lay            of one lay (bobbin, wire, lay, tension) against its style
    jaws           of one lay: what a caliper measures against the mean build
    meter          of a bench: gain and thermometer, the same for every coil

and of the one coil whose lesson is being taken in: `coil` (its wire: stretch), `mould` (its core), `bed` (its
packing). With L, P, G the sums that belong to wire, core and growth,

    R = ohm_per_turn * e^(L + P) * n + growth_ohm * e^(L + G) * n^2 / 2
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import exp, hypot, log, sqrt

from windctl.material.copper import ALPHA_20C
from windctl.material.wire import mass_g_per_m, mass_slopes
from windctl.plan.experience.basis import Basis
from windctl.plan.experience.gaussian import Gaussian, Name
from windctl.plan.experience.lesson import Build, Lesson, Mass, Measured, Resistance, Share

# Relative standard deviations. Our judgement, but for the first three, which the forecast uses as well.
WALK_PER_ROOT_KM = 0.0015  # ohm per metre along a spool, wandering
SLOPE_PER_KM = 0.0018  # and sloping: up to 0.003 either way
COIL_REL = 0.002  # stretch and whatever else scales all of one coil's resistance
METAL_REL = 0.004
JAWS_REL = 0.06
TREND_SD = 0.02  # of the share that the curve shows: the packing loosens, the wire changes along the coil

STYLE_SHARE = 0.5  # part of the packing's variance that a shop's coils of one style have in common

COIL: Name = ("coil", "")
MOULD: Name = ("mould", "")
BED: Name = ("bed", "")
OWN = (COIL, MOULD, BED)


@dataclass(frozen=True, slots=True)
class Roles:
    """Which unknowns one coil depends on, by what they do."""

    wire: tuple[Name, ...]
    core: tuple[Name, ...]
    growth: tuple[Name, ...]
    area: Name
    metal: Name
    jaws: Name
    meter: Name

    def rows(self) -> tuple[dict[Name, float], dict[Name, float], dict[Name, float]]:
        """L, P and G as weighted sums."""
        wire, core, growth = (dict.fromkeys(names, 1.0) for names in (self.wire, self.core, self.growth))
        return wire, core, growth


def roles(basis: Basis, spool: str, bench: str) -> Roles:
    """The unknowns of a coil. A spool that nobody named is one of its own."""
    style = (("style", basis.style),) if basis.style else ()
    return Roles(
        wire=(("level", spool), COIL),
        core=(("core", basis.bobbin), MOULD),
        growth=(("area", spool), *style, ("lay", basis.lay), BED),
        area=("area", spool),
        metal=("metal", spool),
        jaws=("jaws", basis.lay),
        meter=("meter", bench),
    )


def with_spool(belief: Gaussian, spool: str, ohm_per_m_rel: float, overall_rel: float) -> Gaussian:
    """The belief with the unknowns of one spool's wire."""
    return belief.having_all(_of_spool(spool, ohm_per_m_rel, overall_rel))


def _of_spool(spool: str, ohm_per_m_rel: float, overall_rel: float) -> list[tuple[Name, float]]:
    return [
        (("level", spool), ohm_per_m_rel),
        (("slope", spool), SLOPE_PER_KM),
        (("area", spool), 2.0 * overall_rel),
        (("metal", spool), METAL_REL),
    ]


def with_unknowns(
    belief: Gaussian, basis: Basis, spool: str, bench: str, meter_rel: float, unrest: float = 1.0
) -> Gaussian:
    """The belief with all that a coil depends on; what is new in it is as uncertain as its basis says.

    `unrest`: by how much the variance from coil to coil is more than stated.
    """
    shared = STYLE_SHARE if basis.style else 0.0
    more = sqrt(unrest)
    style = [(("style", basis.style), sqrt(shared) * basis.growth_rel)] if basis.style else []
    return belief.having_all(
        [
            *_of_spool(spool, basis.ohm_per_m_rel, basis.overall_rel),
            (("core", basis.bobbin), basis.perimeter_rel),
            *style,
            (("lay", basis.lay), sqrt(1.0 - shared) * basis.growth_rel),
            (("jaws", basis.lay), JAWS_REL),
            (("meter", bench), meter_rel),
            (COIL, more * COIL_REL),
            (MOULD, more * basis.mould_rel),
            (BED, more * basis.bed_rel),
        ]
    )


def along_the_spool(belief: Gaussian, spool: str, metres: float) -> Gaussian:
    """The same spool, `metres` of wire further on."""
    km = metres / 1000.0
    if km <= 0.0 or not belief.knows(("level", spool)):
        return belief
    return belief.drifted(("level", spool), ("slope", spool), km, WALK_PER_ROOT_KM**2 * km)


def meter_rel(gain_rel: float, celsius_sd: float, over_air_sd: float) -> float:
    """What a bench's instruments are off by for every coil alike. Half the variance of how much warmer the
    coils are than the air is the bench's, too."""
    return hypot(gain_rel, ALPHA_20C * celsius_sd, sqrt(0.5) * ALPHA_20C * over_air_sd)


@dataclass(frozen=True, slots=True)
class Expected:
    """What a measurement was expected to show: its logarithm or part, on what that depends, and the variance
    of the measurement's own error; and `off`, what was measured less what was expected."""

    row: Mapping[Name, float]
    off: float
    variance: float


def expected(belief: Gaussian, lesson: Lesson, measured: Measured) -> Expected:
    """One measurement as a weighted sum of the unknowns, linear about the belief's mean."""
    basis, turns = lesson.basis, lesson.turns
    part = roles(basis, lesson.source, lesson.bench)
    wire, core, growth = part.rows()
    level = belief.along(wire)
    flat = basis.ohm_per_turn * turns * exp(level + belief.along(core))
    grown = basis.growth_ohm * turns * turns / 2.0 * exp(level + belief.along(growth))
    ohm = flat + grown
    share = grown / ohm
    metres = _sum((core, 1.0 - share), (growth, share))
    match measured:
        case Resistance():
            row = _sum((metres, 1.0), (wire, 1.0), ({part.meter: 1.0}, 1.0))
            off = log(measured.ohm / ohm) - belief.value(part.meter)
            return Expected(row, off, measured.rel**2)
        case Share():
            steep = share * (1.0 - share)
            row = _sum((growth, steep), (core, -steep))
            return Expected(row, measured.part - share, measured.sd**2 + (TREND_SD * share) ** 2)
        case Mass():
            length = ohm / (basis.ohm_per_m * exp(level))
            bare, overall = basis.wire_sizes(level, belief.value(part.area))
            by_bare, by_area = mass_slopes(bare, overall)
            row = _sum((metres, 1.0), (wire, -by_bare), ({part.area: 1.0}, by_area), ({part.metal: 1.0}, 1.0))
            off = log(measured.grams / (length * mass_g_per_m(bare, overall))) - belief.value(part.metal)
            return Expected(row, off, (measured.sd / measured.grams) ** 2)
        case Build():
            mm = basis.build_per_turn_mm * turns * exp(belief.along(growth))
            row = _sum((growth, 1.0), ({part.jaws: 1.0}, 1.0))
            off = log(measured.mm / mm) - belief.value(part.jaws)
            return Expected(row, off, (measured.sd / measured.mm) ** 2)


def _sum(*parts: tuple[Mapping[Name, float], float]) -> dict[Name, float]:
    total: dict[Name, float] = {}
    for row, factor in parts:
        for name, weight in row.items():
            total[name] = total.get(name, 0.0) + factor * weight
    return total
