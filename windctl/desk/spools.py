"""Spools as people ask about them: what is known of the wire, what is left, and for how many coils."""

from __future__ import annotations

import re
from collections.abc import Collection, Sequence
from dataclasses import dataclass
from math import exp
from typing import TYPE_CHECKING, Any

from windctl.errors import UsageError

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.book.lessons import CoilLesson
    from windctl.book.shelf import SpoolRecord
    from windctl.plan.experience.fold import Experience, Unfit

_NAME = re.compile(r"[A-Za-z0-9][A-Za-z0-9._-]{0,23}")
_NUMBERED = re.compile(r"s(\d{1,9})")

# From how many coils a spool on, each is asked about by itself, which hears a few hundred coils, instead of
# all being learnt from all coils at once.
_BY_ITSELF = 250


@dataclass(frozen=True, slots=True)
class SpoolState:
    """One spool. Resistances in ohm per metre at 20 degrees C; `*_sd` are standard deviations; None is "not
    known". `coils` were wound from it, `taught_by` of them say how its wire is."""

    id: str
    wire: str
    insulation: str
    notes: str
    nominal_ohm_per_m: float
    nominal_ohm_per_m_sd: float
    ohm_per_m: float
    ohm_per_m_sd: float
    coils: int
    taught_by: int
    pieces: int
    left_m: float | None
    left_sd_m: float | None
    metres_each: float | None  # of the coil wound from it last, else of the last one of such wire
    coils_left: int | None
    unfit: tuple[Unfit, ...]
    withdrawn: tuple[tuple[str, str], ...]  # coil, reason
    facts: tuple[dict[str, Any], ...]
    coil_each: str = ""  # whose metres those are

    def as_json(self) -> dict[str, Any]:
        """The spool as other programs read it, format 1."""
        return {
            "format": 1,
            "spool": self.id,
            "wire": self.wire,
            "insulation": self.insulation or None,
            "notes": self.notes or None,
            "nominal_ohm_per_m": self.nominal_ohm_per_m,
            "ohm_per_m": self.ohm_per_m,
            "ohm_per_m_sd": self.ohm_per_m_sd,
            "coils": self.coils,
            "taught_by": self.taught_by,
            "pieces": self.pieces,
            "left_m": self.left_m,
            "left_sd_m": self.left_sd_m,
            "coils_left": self.coils_left,
            "metres_each": self.metres_each,
            "coil_each": self.coil_each or None,
            "unfit": [{"coil": one.coil, "off": exp(one.off) - 1.0} for one in self.unfit],
            "withdrawn": [{"coil": coil, "reason": reason} for coil, reason in self.withdrawn],
            "facts": list(self.facts),
        }


def check_name(name: str) -> str:
    """A name that fits on a label and into a command. Raises UsageError for another."""
    if not _NAME.fullmatch(name):
        raise UsageError(
            f"{name!r} cannot be a spool's name: 1 to 24 letters, digits, points, hyphens and underscores, "
            "the first a letter or a digit"
        )
    return name


def next_name(spools: Collection[SpoolRecord]) -> str:
    """The next free of s1, s2, ..."""
    used = [match for one in spools if (match := _NUMBERED.fullmatch(one.spool.id)) is not None]
    return f"s{max((int(match[1]) for match in used), default=0) + 1}"


def states_of(book: Book) -> tuple[SpoolState, ...]:
    """All spools, in order of their names."""
    from windctl.book.shelf import history
    from windctl.plan.experience.fold import learn

    spools = book.spools()
    if book.count() > _BY_ITSELF * len(spools):
        return tuple(_by_itself(book, record, spools) for record in spools)
    lessons = book.lessons()
    # With everything kept the fold grows with the square of the spools; what a spool's last coil left is
    # what can be said of it.
    learnt = learn(history(lessons, spools), [one.spool for one in spools], keep=())
    return tuple(_state(record, lessons, learnt) for record in spools)


def state_of(book: Book, spool: str) -> SpoolState:
    """One spool, by its own coils and the last ones in the book. Raises BookError when there is none of that
    name."""
    return _by_itself(book, book.spool(spool), book.spools())


def _by_itself(book: Book, record: SpoolRecord, spools: Sequence[SpoolRecord]) -> SpoolState:
    from windctl.book.lessons import moment_of
    from windctl.book.shelf import history
    from windctl.plan.experience.fold import learn

    spool = record.spool.id
    keep = {("level", spool), ("slope", spool), ("area", spool), ("metal", spool)}
    heard = [one for kind in (False, True) for one in book.heard(keep, simulated=kind)]
    lessons = sorted(heard, key=lambda one: (moment_of(one.began), one.lesson.coil))
    learnt = learn(history(lessons, spools), [one.spool for one in spools], keep)
    return _state(record, lessons, learnt)


def _state(record: SpoolRecord, lessons: Sequence[CoilLesson], learnt: Experience) -> SpoolState:
    from windctl.book.shelf import left_in
    from windctl.plan.experience.reel import coils_left
    from windctl.record.addenda import plain

    spool, wire = record.spool, record.spool.wire()
    own = [one for one in lessons if one.lesson.spool == spool.id]
    level = learnt.of(("level", spool.id))
    ohm_per_m = wire.ohm_per_m if level is None else wire.ohm_per_m * exp(level.mean)
    sd = wire.ohm_per_m_sd if level is None else ohm_per_m * level.sd
    left = left_in(record, lessons, learnt)
    like = own or [one for one in lessons if one.lesson.basis.wire.partition(",")[0] == spool.size]
    each = like[-1].lesson.metres if like else None
    return SpoolState(
        id=spool.id,
        wire=wire.label,
        insulation=spool.insulation or "",
        notes=record.added.notes,
        nominal_ohm_per_m=wire.ohm_per_m,
        nominal_ohm_per_m_sd=wire.ohm_per_m_sd,
        ohm_per_m=ohm_per_m,
        ohm_per_m_sd=sd,
        coils=len(own),
        taught_by=0 if level is None else level.coils,
        pieces=len(record.measured),
        left_m=None if left is None else left.metres,
        left_sd_m=None if left is None else left.sd,
        metres_each=each,
        coils_left=None if left is None or not each else coils_left(left, each),
        unfit=tuple(one for one in learnt.unfit if one.spool == spool.id),
        withdrawn=tuple((one.lesson.coil, one.withdrawn) for one in own if one.withdrawn is not None),
        facts=tuple({"kind": fact.kind, **plain(fact)} for fact in record.facts),
        coil_each=like[-1].lesson.coil if like else "",
    )
