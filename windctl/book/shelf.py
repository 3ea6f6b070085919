"""Spools and addenda in the book: adding them, and reading them back."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, replace
from datetime import UTC, datetime

import sqlalchemy as sa

from windctl.book.heads import CoilHead
from windctl.book.imports import imports_in
from windctl.book.logs import COIL, SPOOL, all_facts, append, facts_of, read
from windctl.book.store import Store
from windctl.book.tables import coils
from windctl.book.words import more_words, said_in
from windctl.errors import BookError, RecordBroken
from windctl.material.enamel import Grade
from windctl.plan.experience.fold import Experience, Teaching
from windctl.plan.experience.lesson import Lesson
from windctl.plan.experience.reel import Weighing, left_on
from windctl.plan.experience.spool import PieceMeasured, Spool
from windctl.plan.experience.supply import Left
from windctl.record.addenda import (
    Addendum,
    CoilMeasured,
    CoilTaught,
    SpoolAdded,
    SpoolMeasured,
    SpoolWeighed,
    withdrawn,
)

_GRADES: dict[str, Grade] = {"grade 1": "grade 1", "grade 2": "grade 2"}


@dataclass(frozen=True, slots=True)
class SpoolRecord:
    """All that was said of a spool, in order."""

    spool: Spool
    added: SpoolAdded
    facts: tuple[Addendum, ...]

    @property
    def weighed(self) -> tuple[SpoolWeighed, ...]:
        """Its weighings, the latest last."""
        return tuple(fact for fact in self.facts if isinstance(fact, SpoolWeighed))

    @property
    def measured(self) -> tuple[SpoolMeasured, ...]:
        """Its measured pieces, the latest last."""
        return tuple(fact for fact in self.facts if isinstance(fact, SpoolMeasured))


@dataclass(frozen=True, slots=True)
class CoilLesson:
    """A sealed coil as a teacher: `lesson` with whatever was measured by hand since."""

    began: str
    lesson: Lesson
    withdrawn: str | None  # the reason, where it shall not teach


def add_spool(store: Store, facts: Sequence[Addendum]) -> None:
    """A new spool. The first of `facts` is its SpoolAdded. Raises BookError when it is there already."""
    added = facts[0]
    assert isinstance(added, SpoolAdded)
    name = SPOOL + added.spool
    with store.atomic() as connection:
        if read(connection, name) is not None:
            raise BookError(
                f"spool {added.spool} is in the coil book {store.path} already: give the new one another name"
            )
        append(connection, name, facts)


def add_to_spool(store: Store, spool: str, facts: Sequence[Addendum]) -> None:
    """More about a spool. Raises BookError when there is none of that name."""
    with store.atomic() as connection:
        if read(connection, SPOOL + spool) is None:
            raise _no_spool(store, spool)
        append(connection, SPOOL + spool, facts)


def spools_in(store: Store) -> tuple[SpoolRecord, ...]:
    """All spools, in order of their names."""
    return tuple(_record(facts) for _, facts in sorted(all_facts(store, SPOOL).items()))


def spool_in(store: Store, spool: str) -> SpoolRecord:
    """One spool. Raises BookError when there is none of that name."""
    with store.reading() as connection:
        log = read(connection, SPOOL + spool)
    if log is None:
        raise _no_spool(store, spool)
    return _record(facts_of(log))


def _no_spool(store: Store, spool: str) -> BookError:
    return BookError(
        f"there is no spool {spool!r} in the coil book {store.path}: 'windctl spool list' shows them, "
        "'windctl spool add' adds one"
    )


def _record(facts: Sequence[Addendum]) -> SpoolRecord:
    added = facts[0]
    if not isinstance(added, SpoolAdded):
        raise RecordBroken("the log of a spool does not begin with the spool")
    spool = Spool(
        id=added.spool,
        gauge=added.gauge,
        diameter_mm=added.diameter_mm,
        enamel=None if added.enamel is None else _GRADES.get(added.enamel),
        overall_mm=added.overall_mm,
        insulation=added.insulation or None,
    )
    return SpoolRecord(spool, added, tuple(facts))


def amend(
    store: Store,
    said: Sequence[tuple[CoilHead, Sequence[Addendum]]],
    agreed: Callable[[sa.Connection], None] = lambda _: None,
) -> None:
    """Say something of closed coils, all of it or nothing. Raises BookError for one that is still open.

    `agreed` looks at the book as it is while nobody else can write, and raises where it must not be said.
    """
    for head, _ in said:
        if not head.sealed:
            raise BookError(f"coil {head.number} is still open: this is for coils that are finished with")
    with store.atomic() as connection:
        agreed(connection)
        for head, facts in said:
            append(connection, COIL + head.id, facts)
            if texts := said_in(facts):
                longer = coils.c.words + more_words(texts)
                connection.execute(sa.update(coils).where(coils.c.id == head.id).values(words=longer))


def addenda_in(store: Store, head: CoilHead) -> tuple[Addendum, ...]:
    """What was said of a coil after it was closed."""
    with store.reading() as connection:
        return facts_of(read(connection, COIL + head.id))


def untaught_in(store: Store) -> tuple[str, ...]:
    """Numbers of closed coils whose lesson was not written down, because the program was ended in between."""
    taught = {
        coil
        for coil, facts in all_facts(store, COIL).items()
        if any(isinstance(f, CoilTaught) for f in facts)
    }
    query = sa.select(coils.c.id, coils.c.number).where(coils.c.trace_digest.is_not(None))
    with store.reading() as connection:
        rows = [tuple(row) for row in connection.execute(query.order_by(coils.c.started, coils.c.number))]
        silent = imports_in(connection).silent
    return tuple(number for coil, number in rows if coil not in taught and coil not in silent)


def lessons_in(store: Store, unwritten: Iterable[tuple[str, Lesson]] = ()) -> tuple[CoilLesson, ...]:
    """The lessons of all closed coils that have one, in the order in which the coils were begun. Imported
    coils have one only where they are to teach here.

    `unwritten`: by coil number, those that are not written down.
    """
    given = dict(unwritten)
    said = all_facts(store, COIL)
    with store.reading() as connection:
        query = sa.select(coils.c.id, coils.c.number, coils.c.started, coils.c.outcome)
        rows = [tuple(row) for row in connection.execute(query)]
        silent = imports_in(connection).silent
    found = []
    for coil, number, started, outcome in sorted(rows, key=lambda row: (_moment(row[2]), row[1])):
        if coil in silent:
            continue
        facts = said.get(coil, [])
        lesson = given.get(number)
        for fact in facts:
            if isinstance(fact, CoilTaught):
                lesson = fact.lesson
        if lesson is not None:
            out = withdrawn(facts)
            if outcome == "finished":
                lesson = _with_hand(lesson, facts)
            found.append(CoilLesson(started, lesson, None if out is None else out.reason))
    return tuple(found)


def _with_hand(lesson: Lesson, facts: Iterable[Addendum]) -> Lesson:
    by_hand = tuple(one for fact in facts if isinstance(fact, CoilMeasured) for one in fact.measured)
    return replace(lesson, measured=(*lesson.measured, *by_hand))


def history(lessons: Iterable[CoilLesson], spools: Iterable[SpoolRecord]) -> tuple[Teaching, ...]:
    """All that teaches, in order of time: coils that are not withdrawn, and pieces measured from spools."""
    timed: list[tuple[float, int, str, Teaching]] = [
        (_moment(one.began), 1, one.lesson.coil, one.lesson) for one in lessons if one.withdrawn is None
    ]
    for record in spools:
        for at, fact in enumerate(record.measured):
            piece = PieceMeasured(record.spool.id, fact.ohm_per_m, fact.rel)
            timed.append((_moment(fact.wall_time), 0, f"{record.spool.id} {at:06d}", piece))
    return tuple(teaching for *_, teaching in sorted(timed, key=lambda each: each[:3]))


def left_in(record: SpoolRecord, lessons: Iterable[CoilLesson], experience: Experience) -> Left | None:
    """The wire left on a spool: its last weighing, less all coils begun since, withdrawn ones too. None where
    it was never weighed."""
    if not record.weighed:
        return None
    last = record.weighed[-1]
    since = sum(
        one.lesson.metres
        for one in lessons
        if one.lesson.spool == record.spool.id and _moment(one.began) >= _moment(last.wall_time)
    )
    return left_on(record.spool, experience, Weighing(last.grams, last.grams_sd, since))


def _moment(text: str) -> float:
    """Seconds for ordering texts of time with different offsets; what is no time comes first."""
    try:
        moment = datetime.fromisoformat(text)
    except ValueError:
        return 0.0
    return (moment if moment.tzinfo is not None else moment.replace(tzinfo=UTC)).timestamp()
