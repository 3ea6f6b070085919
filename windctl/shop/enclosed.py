"""What several finished coils enclose, turns times area, and how far their errors are common.

Count and core are known; the build is not. What is known of it beforehand comes from what the shop's coils
taught (packing and crown of the lay, the spool's wire, the kind of bobbin), and each coil's own measurements
are evidence besides: its resistance tells the mean length of a turn, as far as the wire's ohm per metre is
known, which coils from one spool have in common, as coils of one bench have the meter. So all coils in
question, and the others from their spools, are taken together in one linear Gaussian step: what is common
stands in unknowns of its own, and falls out of the difference of two coils by itself.

Unknowns and the way measurements depend on them are those that coils teach with (`plan.experience`).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from math import exp, hypot, log, sqrt

import numpy as np
from numpy.typing import NDArray

from windctl.coil.geometry import Core
from windctl.coil.turns_area import Winding, bow_sd, slopes, third_moment, winding_of
from windctl.plan.experience.fold import Experience, at_coil
from windctl.plan.experience.gaussian import Gaussian, Name
from windctl.plan.experience.lesson import Lesson
from windctl.plan.experience.unknowns import OWN, WALK_PER_ROOT_KM, expected, roles, with_unknowns
from windctl.shop.hum import Mismatch, mismatch_of

F64 = NDArray[np.float64]

_COUNT_SD = 0.3  # turns: where the leads leave the coil. Our judgement
_LAY_ALIKE = 0.5  # of the variance that coils of one lay share, so much is common to other lays too


@dataclass(frozen=True, slots=True)
class Known:
    """A coil to be told. `core`: as drawn or measured; `lesson`: its count and what was measured of it;
    `count_sd`: of the count, in turns, where somebody had to say it."""

    core: Core
    lesson: Lesson
    count_sd: float = 0.0


@dataclass(frozen=True, slots=True)
class Enclosed:
    """Turns-areas of some coils. log_cov: f64[n, n], the covariance of their logarithms."""

    windings: tuple[Winding, ...]
    turns: tuple[float, ...]
    log_cov: F64

    def turns_area_m2(self, at: int) -> float:
        """N*A of one coil, m2."""
        return self.turns[at] * self.windings[at].mean_area_mm2 * 1e-6

    def rel(self, at: int) -> float:
        """Its relative standard deviation."""
        return sqrt(float(self.log_cov[at, at]))

    def mismatch(self, one: int, other: int) -> Mismatch:
        """Of two coils, what is common to both left out."""
        cov = self.log_cov
        variance = float(cov[one, one] + cov[other, other] - 2 * cov[one, other])
        ratio = log(self.turns_area_m2(one) / self.turns_area_m2(other))
        return mismatch_of(ratio, sqrt(max(variance, 0.0)))


def unknowns_of(lesson: Lesson) -> set[Name]:
    """What a coil shares with others, by name: all that an experience must keep to tell of it."""
    part = roles(lesson.basis, lesson.source, lesson.bench)
    names = {*part.wire, *part.core, *part.growth, part.area, part.metal, part.jaws, part.meter}
    return (names | {("slope", lesson.source)}) - set(OWN)


def enclosed(coils: Sequence[Known], lessons: Sequence[Lesson], experience: Experience) -> Enclosed:
    """`lessons`: those of `coils` and of all other coils from their spools, in the order in which they were
    begun; `experience`: what every coil but these has taught."""
    told = _Told(lessons, experience)
    at = {lesson.coil: n for n, lesson in enumerate(lessons)}
    picked = [at[one.lesson.coil] for one in coils]
    means, cov = told.core_and_growth(picked)
    windings, rows, own = [], [], []
    for n, one in enumerate(coils):
        basis = one.lesson.basis
        growth = basis.build_per_turn_mm * basis.crown * one.lesson.turns * exp(float(means[2 * n + 1]))
        # the basis has the perimeter that the core is drawn with
        winding = winding_of(one.core, float(means[2 * n]), growth, basis.crown)
        slope = slopes(winding)
        windings.append(winding)
        rows.append([slope.perimeter, slope.growth])
        count = hypot(_COUNT_SD, one.count_sd) / one.lesson.turns
        own.append(hypot(count, slope.bow * bow_sd(one.core)[1]))
    mix = np.zeros((len(coils), 2 * len(coils)))
    for n, row in enumerate(rows):
        mix[n, 2 * n : 2 * n + 2] = row
    log_cov = mix @ cov @ mix.T + np.diag(np.square(own)) + _of_lays(coils, windings)
    return Enclosed(tuple(windings), tuple(one.lesson.turns for one in coils), log_cov)


def _of_lays(coils: Sequence[Known], windings: Sequence[Winding]) -> F64:
    """What coils of one lay have in common besides: how they bow, and how the crown is shaped."""
    slope = [slopes(winding) for winding in windings]
    bow = np.array([each.bow * bow_sd(coil.core)[0] for each, coil in zip(slope, coils, strict=True)])
    third = np.array([each.third * third_moment(w.crown)[1] for each, w in zip(slope, windings, strict=True)])
    lays = [coil.lesson.basis.lay for coil in coils]
    alike = np.array([[1.0 if one == other else _LAY_ALIKE for other in lays] for one in lays])
    common: F64 = alike * (np.outer(bow, bow) + np.outer(third, third))
    return common


class _Told:
    """All measurements of some coils as one linear system over named unknowns.

    The shared unknowns are those of the experience. Each coil has its place along its spool, where the level
    has walked by then, and what it has for itself.
    """

    def __init__(self, lessons: Sequence[Lesson], experience: Experience) -> None:
        self.lessons = lessons
        wound: dict[str, float] = {}
        sources = list(dict.fromkeys(lesson.source for lesson in lessons))
        self.spool = np.array([sources.index(lesson.source) for lesson in lessons])
        self.km = np.zeros(len(lessons))
        self.theres: list[Gaussian] = []  # what each coil depends on, and nothing else: a dozen unknowns
        self.index = {name: at for at, name in enumerate(experience.belief.names)}
        fresh: list[float] = []  # variances of what nothing was learnt of
        for at, lesson in enumerate(lessons):
            before = wound.get(lesson.source, 0.0)
            wound[lesson.source] = before + lesson.metres
            self.km[at] = (before + lesson.metres / 2.0) / 1000.0
            mine = unknowns_of(lesson)
            learnt = experience.belief.without([name for name in experience.belief.names if name not in mine])
            begun = with_unknowns(learnt, lesson.basis, lesson.source, lesson.bench, lesson.meter_rel)
            for name in begun.names:
                if name not in self.index and name not in OWN:
                    self.index[name] = len(self.index)
                    fresh.append(begun.sd(name) ** 2)
            here = replace(experience, belief=learnt, places={}, wound={lesson.source: before})
            self.theres.append(at_coil(here, lesson).belief)
        known = len(experience.belief.names)
        self.cov = np.diag([*[0.0] * known, *fresh])
        if known:
            self.cov[:known, :known] = experience.belief.cov

    def core_and_growth(self, picked: Sequence[int]) -> tuple[F64, F64]:
        """Means f64[2n] and covariance f64[2n, 2n] of core and growth (relative deviations from the basis) of
        the coils `picked`, in turn, after everything that was measured of all coils."""
        system = _System(self)
        for at, lesson in enumerate(self.lessons):
            for measured in lesson.measured:
                seen = expected(self.theres[at], lesson, measured)
                system.add(at, seen.row, seen.off, seen.variance)
        targets = _System(self)
        for at in picked:
            lesson = self.lessons[at]
            _, core, growth = roles(lesson.basis, lesson.source, lesson.bench).rows()
            for row in (core, growth):
                targets.add(at, row, self.theres[at].along(row), 0.0)
        before = np.array(targets.offs)
        spread = targets.against(targets)
        if not system.offs:
            return before, spread
        seen_cov = system.against(system) + np.diag(system.noise)
        across = targets.against(system)
        gain = np.linalg.solve(seen_cov, across.T).T
        after = spread - gain @ across.T
        return before + gain @ np.array(system.offs), (after + after.T) / 2


class _System:
    """Weighted sums of the unknowns: over the shared ones, over each coil's own, and along the spools."""

    def __init__(self, told: _Told) -> None:
        self._told = told
        self._coils: list[int] = []
        self._shared: list[F64] = []
        self._own: list[Mapping[Name, float]] = []
        self._walk: list[float] = []
        self.offs: list[float] = []
        self.noise: list[float] = []

    def add(self, coil: int, row: Mapping[Name, float], off: float, variance: float) -> None:
        """One sum about one coil. A level is that of the spool's beginning, sloped and walked to the coil."""
        told = self._told
        source, km = told.lessons[coil].source, float(told.km[coil])
        weights = np.zeros(len(told.index))
        for name, weight in row.items():
            if name not in OWN:
                weights[told.index[name]] += weight
        level = row.get(("level", source), 0.0)
        weights[told.index[("slope", source)]] += level * km
        self._coils.append(coil)
        self._shared.append(weights)
        self._own.append({name: weight for name, weight in row.items() if name in OWN})
        self._walk.append(level)
        self.offs.append(off)
        self.noise.append(variance)

    def against(self, other: _System) -> F64:
        """The covariance of these sums with the other's, before anything was measured."""
        told = self._told
        total: F64 = np.array(self._shared) @ told.cov @ np.array(other._shared).T
        shorter = np.minimum.outer(told.km[self._coils], told.km[other._coils])
        same = np.equal.outer(told.spool[self._coils], told.spool[other._coils])
        total += np.outer(self._walk, other._walk) * WALK_PER_ROOT_KM**2 * np.where(same, shorter, 0.0)
        for i, j in np.argwhere(np.equal.outer(self._coils, other._coils)):
            belief = told.theres[self._coils[i]]
            total[i, j] += belief.covariance(self._own[i], other._own[j])
        return total
