"""Lessons in order -> what is known.

What is known is this fold and nothing else, so to withdraw a coil is to fold without it: what was known
before comes back to the last bit. A withdrawn coil counts as never wound, its wire too.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from math import log, sqrt

from windctl.plan.experience.gaussian import Gaussian, Name
from windctl.plan.experience.lesson import Lesson, Measured, Resistance
from windctl.plan.experience.spool import PieceMeasured, Spool
from windctl.plan.experience.unknowns import (
    OWN,
    Expected,
    along_the_spool,
    expected,
    roles,
    with_spool,
    with_unknowns,
)
from windctl.plan.experience.unrest import Unrest

# A coil whose resistance is further off than this teaches nothing: a shorted turn, a wrong wire or count.
GATE = 5.0

Teaching = Lesson | PieceMeasured


@dataclass(frozen=True, slots=True)
class Unfit:
    """A coil too far off to teach: by `off` (relative), where a standard deviation of `sd` was foreseen."""

    coil: str
    spool: str
    off: float
    sd: float


@dataclass(frozen=True, slots=True)
class Known:
    """A relative deviation, and from how many coils it is known."""

    mean: float
    sd: float
    coils: int


@dataclass(frozen=True, slots=True)
class Experience:
    """What is known after some lessons.

    places: where on each spool its level stands, in metres wound; wound: how many were; coils: how many
    taught each unknown; past: levels of spools that are not followed any further.
    """

    belief: Gaussian = field(default_factory=Gaussian)
    places: Mapping[str, float] = field(default_factory=dict)
    wound: Mapping[str, float] = field(default_factory=dict)
    coils: Mapping[Name, int] = field(default_factory=dict)
    past: Mapping[Name, Known] = field(default_factory=dict)
    unfit: tuple[Unfit, ...] = ()
    unrest: Mapping[str, Unrest] = field(default_factory=dict)  # by lay

    def of(self, name: Name) -> Known | None:
        """What is known of one unknown; None where no lesson was about it."""
        if self.belief.knows(name):
            return Known(self.belief.value(name), self.belief.sd(name), self.coils.get(name, 0))
        return self.past.get(name)

    def moved(self, spool: str, metres: float) -> Experience:
        """With the level of a spool followed to the place where so many metres were wound from it."""
        ahead = metres - self.places.get(spool, 0.0)
        if ahead <= 0.0:
            return self
        belief = along_the_spool(self.belief, spool, ahead)
        return replace(self, belief=belief, places={**self.places, spool: metres})


def learn(
    history: Sequence[Teaching], spools: Iterable[Spool] = (), keep: Collection[Name] | None = None
) -> Experience:
    """All lessons, in the order in which the coils were begun and the spools measured.

    `keep`: the unknowns that will be asked for (None: all); others are dropped once no lesson is left that is
    about them, which changes nothing for those kept.
    """
    wires = {spool.id: spool for spool in spools}
    last = {name: at for at, teaching in enumerate(history) for name in _about(teaching)}
    done = Experience()
    for at, teaching in enumerate(history):
        if isinstance(teaching, Lesson):
            done = _after_coil(done, teaching)
        elif teaching.spool in wires:
            done = _after_piece(done, teaching, wires[teaching.spool])
        if keep is not None:
            done = _dropped(
                done, [name for name in _about(teaching) if last[name] == at and name not in keep]
            )
    return done


def at_coil(before: Experience, lesson: Lesson) -> Experience:
    """What is known as a coil is begun, with all its unknowns, and the spool's level at the coil's middle."""
    source = lesson.source
    unrest = before.unrest.get(lesson.basis.lay, Unrest()).factor
    belief = with_unknowns(before.belief, lesson.basis, source, lesson.bench, lesson.meter_rel, unrest)
    middle = before.wound.get(source, 0.0) + lesson.metres / 2.0
    return replace(before, belief=belief).moved(source, middle)


def _after_coil(before: Experience, lesson: Lesson) -> Experience:
    there = at_coil(before, lesson)
    source = lesson.source
    wound = {**before.wound, source: before.wound.get(source, 0.0) + lesson.metres}
    there = replace(there, wound=wound)
    ohms = [_foreseen(there.belief, lesson, one) for one in lesson.measured if isinstance(one, Resistance)]
    unfit = _unfit(lesson, ohms)
    there = _heard(before, there, lesson, ohms)
    if unfit is not None:
        return replace(there, belief=there.belief.without(OWN), unfit=(*there.unfit, unfit))
    belief = there.belief
    for measured in lesson.measured:
        fresh = belief is there.belief and isinstance(measured, Resistance)  # then it was worked out already
        belief = (ohms[0] if fresh else _foreseen(belief, lesson, measured)).told(belief)
    coils = dict(there.coils)
    if lesson.measured:
        for name in _about(lesson):
            coils[name] = coils.get(name, 0) + 1
    return replace(there, belief=belief.without(OWN), coils=coils)


@dataclass(frozen=True, slots=True)
class _Foreseen:
    """What was expected of a measurement, and the covariance of every unknown with it."""

    seen: Expected
    spread: Sequence[float]
    variance: float  # with that of the measurement's own error

    def told(self, belief: Gaussian) -> Gaussian:
        """After it came out as it did. `belief`: the one that expected it."""
        return belief.told(self.seen.row, self.seen.off, self.seen.variance, self.spread)


def _foreseen(belief: Gaussian, lesson: Lesson, measured: Measured) -> _Foreseen:
    seen = expected(belief, lesson, measured)
    spread = belief.spread(seen.row)
    return _Foreseen(seen, spread, belief.weighed(seen.row, spread) + seen.variance)


def _unfit(lesson: Lesson, ohms: Sequence[_Foreseen]) -> Unfit | None:
    for one in ohms:
        sd = sqrt(one.variance)
        if abs(one.seen.off) > GATE * sd:
            return Unfit(lesson.coil, lesson.spool, one.seen.off, sd)
    return None


def _heard(before: Experience, there: Experience, lesson: Lesson, ohms: Sequence[_Foreseen]) -> Experience:
    """Whether a coil differs from those before as was stated; a first coil, and one far off, says nothing."""
    lay = lesson.basis.lay
    taught = min(before.coils.get(name, 0) for name in (("lay", lay), ("level", lesson.source)))
    if taught == 0 or not ohms:
        return there
    seen, variance = ohms[0].seen, ohms[0].variance
    unrest = before.unrest.get(lay, Unrest())
    own = {name: seen.row[name] for name in OWN if name in seen.row}
    stated = variance - (1.0 - 1.0 / unrest.factor) * there.belief.covariance(own, own)
    surprise = max(-GATE, min(GATE, seen.off / sqrt(variance))) * sqrt(variance)
    return replace(there, unrest={**before.unrest, lay: unrest.heard(surprise, stated)})


def _after_piece(before: Experience, piece: PieceMeasured, spool: Spool) -> Experience:
    wire, level = spool.wire(), ("level", spool.id)
    belief = with_spool(
        before.belief, spool.id, wire.ohm_per_m_sd / wire.ohm_per_m, wire.overall_sd_mm / wire.overall_mm
    )
    here = replace(before, belief=belief).moved(spool.id, before.wound.get(spool.id, 0.0))
    off = log(piece.ohm_per_m / wire.ohm_per_m) - here.belief.value(level)
    return replace(here, belief=here.belief.told({level: 1.0}, off, piece.rel**2))


def _about(teaching: Teaching) -> list[Name]:
    """The unknowns of a lesson that outlive its coil."""
    if isinstance(teaching, PieceMeasured):
        return _of_spool(teaching.spool)
    part = roles(teaching.basis, teaching.source, teaching.bench)
    names = [*_of_spool(teaching.source), *part.core, *part.growth, part.jaws, part.meter]
    return [name for name in dict.fromkeys(names) if name not in OWN]


def _of_spool(spool: str) -> list[Name]:
    return [(what, spool) for what in ("level", "slope", "area", "metal")]


def _dropped(done: Experience, names: Collection[Name]) -> Experience:
    if not names:
        return done
    past = dict(done.past)
    for name in names:
        known = done.of(name)
        if known is not None:
            past[name] = known
    return replace(done, belief=done.belief.without(names), past=past)
