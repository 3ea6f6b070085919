"""What a finished coil of unknown make is wound with, from what can be measured outside.

How well each wire explains what was measured gives its odds. Turns, length and diameter are what each wire
makes of the measurements, weighed by these odds.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from math import exp
from typing import Literal

from windctl.errors import UsageError
from windctl.material.enamel import Grade
from windctl.material.gauge import METRIC, awg_diameter_mm
from windctl.material.wire import resolve
from windctl.shop.mixture import Interval, Part, interval_of_log
from windctl.shop.one_wire import Fit, Outside, Style, fit

Sizes = Literal["awg", "metric"]

_AWG = range(38, 45)  # those whose enamel is in the table
_GRADES: tuple[Grade, ...] = ("grade 1", "grade 2")
_STYLES: tuple[Style, ...] = ("scatter", "even")
_NEGLIGIBLE = 1e-7
_IMPOSSIBLE = -14.0  # of the logarithm of the best wire's likelihood: some five standard deviations off


@dataclass(frozen=True, slots=True)
class Candidate:
    """One wire that it might be, in one style of lay, and how likely that is."""

    size: str
    enamel: Grade
    probability: float
    fit: Fit


@dataclass(frozen=True, slots=True)
class Size:
    """One bare size, whatever its enamel."""

    name: str
    bare_mm: float
    probability: float

    @property
    def odds(self) -> float:
        """How many to one, for it against all others together; at most a million."""
        return self.probability / max(1.0 - self.probability, 1e-6)


@dataclass(frozen=True, slots=True)
class Findings:
    """The likeliest sizes first; turns, wire length in m, bare diameter in mm, packing: 95 % intervals."""

    outside: Outside
    sizes: tuple[Size, ...]
    candidates: tuple[Candidate, ...]
    turns: Interval
    length_m: Interval
    bare_mm: Interval
    packing: Interval

    @property
    def best(self) -> Candidate:
        """The likeliest wire of the likeliest size."""
        return next(one for one in self.candidates if one.size == self.sizes[0].name)


def identify(
    outside: Outside, sizes: Sizes = "awg", enamel: Grade | None = None, style: Style | None = None
) -> Findings:
    """What the coil is wound with; `enamel` and `style` where they are known.

    All sizes, both grades and both styles are as likely as each other before anything is measured. Raises
    UsageError where no wire of these sizes can have made the coil.
    """
    found = [
        Candidate(name, grade, 0.0, _fit(outside, name, bare_mm, grade, lay))
        for name, bare_mm in _named(sizes)
        for grade in (_GRADES if enamel is None else (enamel,))
        for lay in (_STYLES if style is None else (style,))
    ]
    best = max(one.fit.log_likelihood for one in found)
    if best < _IMPOSSIBLE:
        names = [name for name, _ in _named(sizes)]
        raise UsageError(
            f"no wire from {names[0]} to {names[-1]} makes a coil of {outside.ohm_20c:.0f} ohm at 20 °C with "
            f"a build of {outside.build_mm:g} mm on this bobbin: check the figures and their units"
        )
    weights = [exp(one.fit.log_likelihood - best) for one in found]
    weighed = [replace(one, probability=w / sum(weights)) for one, w in zip(found, weights, strict=True)]
    ranked = sorted(weighed, key=lambda one: -one.probability)  # stable: equal ones stay in their order
    return Findings(
        outside=outside,
        sizes=_by_size(ranked, dict(_named(sizes))),
        candidates=tuple(ranked),
        turns=_interval(ranked, lambda one: one.turns()),
        length_m=_interval(ranked, lambda one: one.length_m(outside)),
        bare_mm=_interval(ranked, lambda one: one.bare_mm()),
        packing=_interval(ranked, lambda one: one.packing()),
    )


def _named(sizes: Sizes) -> list[tuple[str, float]]:
    """Names and bare diameters, the thickest first."""
    if sizes == "awg":
        return [(f"AWG {number}", awg_diameter_mm(number)) for number in _AWG]
    return [(f"{size.bare_mm:g} mm", size.bare_mm) for size in reversed(METRIC)]


def _fit(outside: Outside, name: str, bare_mm: float, grade: Grade, style: Style) -> Fit:
    gauge = name if name.startswith("AWG") else None
    wire = resolve(gauge=gauge, diameter_mm=None if gauge else bare_mm, enamel=grade)
    return fit(outside, wire, grade, style)


def _by_size(candidates: Sequence[Candidate], bare_mm: dict[str, float]) -> tuple[Size, ...]:
    total = dict.fromkeys(bare_mm, 0.0)
    for one in candidates:
        total[one.size] += one.probability
    sizes = [Size(name, bare_mm[name], probability) for name, probability in total.items()]
    return tuple(sorted(sizes, key=lambda size: -size.probability))


def _interval(candidates: Sequence[Candidate], figure: Callable[[Fit], Part]) -> Interval:
    likely = [one for one in candidates if one.probability > _NEGLIGIBLE]
    return interval_of_log([replace(figure(one.fit), weight=one.probability) for one in likely])
