"""One wire that a coil might be wound with, against what was measured of the coil.

Resistance, build and mass are three looks at the same few unknowns, all nearly linear in their logarithms:

    length l = N * (P0 + pi * k * b),   build b = c * N,   c = a / (packing * gap)
    R = rho(wire) * l,   M = (copper + enamel)(wire) * l

The turns N are free; the wire's tolerance and thickness, packing, crown and perimeter have the spreads that
tables and common practice give them.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from math import exp, hypot, log, pi, sqrt
from typing import Literal

from windctl.coil.geometry import Core
from windctl.material.copper import to_20c
from windctl.material.enamel import Grade, increase_mm
from windctl.material.gauge import bare_mm_for
from windctl.material.wire import Wire, mass_g_per_m, mass_slopes
from windctl.plan.experience.gaussian import Gaussian, Name
from windctl.shop.mixture import Part

Style = Literal["scatter", "even"]

# Enamelled wire area over window area, mean and sd, of whatever was wound anywhere: scatter lies between 0.54
# and 0.72, even between 0.67 and 0.80. Common practice, no source.
PACKING: dict[Style, tuple[float, float]] = {"scatter": (0.63, 0.054), "even": (0.735, 0.040)}

# Relative standard deviations. Our judgement.
_SPOOL_REL = 0.04  # ohm per metre from spool to spool: +-8 % are the limits for fine wire
_STRETCH, _STRETCH_REL = 0.003, 0.003  # wound wire is a little thinner
_CROWN, _CROWN_REL = 1.06, 0.04  # of a lay that nobody saw
_PERIMETER_REL = 0.005  # of a core measured with a caliper
_GAP_REL = 0.01
_METAL_REL = 0.004  # copper's density and resistivity, the enamel's density
_JAWS, _JAWS_REL = 1.04, 0.04  # a caliper rests on the highest heaps: over the mean build
_MICROMETER_MM = 0.001
_ANY_TURNS = 3.0

# Logarithms of ratios, but for the turns', which is the logarithm of their number.
TURNS: Name = ("turns", "")
LEVEL: Name = ("level", "")  # ohm per metre over the table's
AREA: Name = ("area", "")  # cross-section with enamel over the grade's middle
FILL: Name = ("fill", "")  # packing, and the gap with it
CROWN: Name = ("crown", "")
PERIMETER: Name = ("perimeter", "")
METAL: Name = ("metal", "")
JAWS: Name = ("jaws", "")

_ROUNDS = 8
_STANDS = 1e-6


@dataclass(frozen=True, slots=True)
class Outside:
    """What was measured. `ohm` at `celsius`, leads taken off; `*_rel` and `*_sd` are standard deviations.

    `build_mm`: from the core to the winding's surface at the ends of the core. `grams`: the wire alone.
    `overall_mm`: over the enamel of a loose end, by micrometer.
    """

    ohm: float
    ohm_rel: float
    celsius: float
    celsius_sd: float
    core: Core
    gap_mm: float
    build_mm: float
    build_sd_mm: float
    grams: float | None = None
    grams_sd: float = 0.05
    overall_mm: float | None = None

    @property
    def ohm_20c(self) -> float:
        """Resistance at 20 degrees C."""
        return to_20c(self.ohm, self.celsius)

    @property
    def ohm_20c_rel(self) -> float:
        """Its relative standard deviation."""
        return hypot(self.ohm_rel, 1.0 - to_20c(1.0, 20.0 + self.celsius_sd))


@dataclass(frozen=True, slots=True)
class Fit:
    """A wire in a style of lay: what it makes of the measurements, and how likely they were with it."""

    wire: Wire
    style: Style
    belief: Gaussian
    log_likelihood: float

    def turns(self) -> Part:
        """Logarithm of the turns; the weight is left at 1."""
        return self._part({TURNS: 1.0}, 0.0)

    def bare_mm(self) -> Part:
        """Logarithm of the diameter that the copper really has."""
        return self._part({LEVEL: -0.5}, log(bare_mm_for(self.wire.ohm_per_m)))

    def ohm_per_m(self) -> Part:
        """Logarithm of the ohm per metre at 20 degrees C."""
        return self._part({LEVEL: 1.0}, log(self.wire.ohm_per_m))

    def packing(self) -> Part:
        """Logarithm of the packing."""
        return self._part({FILL: 1.0}, log(PACKING[self.style][0]))

    def length_m(self, outside: Outside) -> Part:
        """Logarithm of the wire's length."""
        at = _at(outside, self.wire, self.style, self.belief)
        mean = log(at.metres)
        return Part(1.0, mean, sqrt(self.belief.covariance(at.length, at.length)))

    def _part(self, row: dict[Name, float], nominal: float) -> Part:
        return Part(1.0, nominal + self.belief.along(row), sqrt(self.belief.covariance(row, row)))


def fit(outside: Outside, wire: Wire, grade: Grade, style: Style) -> Fit:
    """The measurements taken in, slopes where the belief ends up: gone through until that place stands."""
    start = at = _start(outside, wire, grade, style)
    belief, likely = start, 0.0
    for _ in range(_ROUNDS):
        belief, likely = start, 0.0
        for look in _looks(outside, wire, _at(outside, wire, style, at), at):
            shift = sum(slope * (belief.value(n) - at.value(n)) for n, slope in look.row.items())
            off = look.seen - look.foreseen - shift
            total = belief.covariance(look.row, look.row) + look.variance
            likely -= 0.5 * (off * off / total + log(total))
            belief = belief.told(look.row, off, look.variance)
        moved = max(abs(a - b) for a, b in zip(belief.mean, at.mean, strict=True))
        at = belief
        if moved < _STANDS:
            break
    return Fit(wire, style, belief, likely)


def _start(outside: Outside, wire: Wire, grade: Grade, style: Style) -> Gaussian:
    """Nothing is known of the turns, the usual of the rest."""
    packing, packing_sd = PACKING[style]
    least, greatest = increase_mm(wire.bare_mm, grade)
    overall_rel = (greatest - least) / sqrt(12.0) / wire.overall_mm  # anywhere in its grade
    turn_mm = outside.core.perimeter_mm + pi * _CROWN * outside.build_mm / _JAWS
    turns = outside.ohm_20c / wire.ohm_per_m * 1000.0 / turn_mm
    start = Gaussian().having(TURNS, _ANY_TURNS, log(turns))
    start = start.having(LEVEL, hypot(_SPOOL_REL, _STRETCH_REL), _STRETCH).having(AREA, 2.0 * overall_rel)
    start = start.having(FILL, hypot(packing_sd / packing, _GAP_REL)).having(CROWN, _CROWN_REL, log(_CROWN))
    start = start.having(PERIMETER, _PERIMETER_REL).having(METAL, _METAL_REL)
    return start.having(JAWS, _JAWS_REL, log(_JAWS))


@dataclass(frozen=True, slots=True)
class _At:
    """The coil with the unknowns at some place, and how the logarithm of its length goes with them."""

    build_mm: float
    metres: float
    length: dict[Name, float]


def _at(outside: Outside, wire: Wire, style: Style, at: Gaussian) -> _At:
    turns = exp(at.value(TURNS))
    filled = PACKING[style][0] * outside.gap_mm * exp(at.value(FILL))
    build = turns * wire.overall_area_mm2 * exp(at.value(AREA)) / filled
    flat = outside.core.perimeter_mm * exp(at.value(PERIMETER))
    grown = pi * exp(at.value(CROWN)) * build
    share = grown / (flat + grown)
    length = {TURNS: 1.0 + share, PERIMETER: 1.0 - share, CROWN: share, AREA: share, FILL: -share}
    return _At(build, turns * (flat + grown) / 1000.0, length)


@dataclass(frozen=True, slots=True)
class _Look:
    """The logarithm of one measurement: as seen, as foreseen at a place, its slopes there, and the variance
    of its own error."""

    seen: float
    foreseen: float
    row: dict[Name, float]
    variance: float


def _looks(outside: Outside, wire: Wire, there: _At, at: Gaussian) -> Iterator[_Look]:
    level = at.value(LEVEL)
    yield _Look(
        log(outside.build_mm),
        log(there.build_mm) + at.value(JAWS),
        {TURNS: 1.0, AREA: 1.0, FILL: -1.0, JAWS: 1.0},
        (outside.build_sd_mm / outside.build_mm) ** 2,
    )
    yield _Look(
        log(outside.ohm_20c),
        log(there.metres * wire.ohm_per_m) + level,
        there.length | {LEVEL: 1.0},
        outside.ohm_20c_rel**2,
    )
    if outside.overall_mm is not None:
        yield _Look(
            2.0 * log(outside.overall_mm / wire.overall_mm),
            at.value(AREA),
            {AREA: 1.0},
            (2.0 * _MICROMETER_MM / outside.overall_mm) ** 2,
        )
    if outside.grams is not None:
        bare, overall = bare_mm_for(wire.ohm_per_m * exp(level)), wire.overall_mm * exp(at.value(AREA) / 2.0)
        by_bare, by_area = mass_slopes(bare, overall)
        yield _Look(
            log(outside.grams),
            log(there.metres * mass_g_per_m(bare, overall)) + at.value(METAL),
            there.length | {AREA: there.length[AREA] + by_area, LEVEL: -by_bare, METAL: 1.0},
            (outside.grams_sd / outside.grams) ** 2,
        )
