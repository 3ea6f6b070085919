"""Spools and addenda in the book: adding them, and reading them back."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass

import sqlalchemy as sa

from windctl.book.heads import CoilHead
from windctl.book.lessons import CoilLesson, keep_row, moment_of
from windctl.book.logs import COIL, SPOOL, all_facts, append, facts_by_log, facts_of, read
from windctl.book.store import Store
from windctl.book.tables import coils
from windctl.book.words import more_words, said_in
from windctl.errors import BookError, RecordBroken
from windctl.material.enamel import Grade
from windctl.plan.experience.fold import Experience, Teaching
from windctl.plan.experience.reel import Weighing, left_on
from windctl.plan.experience.spool import PieceMeasured, Spool
from windctl.plan.experience.supply import Left
from windctl.record.addenda import (
    Addendum,
    SpoolAdded,
    SpoolMeasured,
    SpoolWeighed,
)

_AT_ONCE = 500  # coils in one statement

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
            keep_row(connection, head.id)
            if texts := said_in(facts):
                longer = coils.c.words + more_words(texts)
                connection.execute(sa.update(coils).where(coils.c.id == head.id).values(words=longer))


def addenda_in(store: Store, head: CoilHead) -> tuple[Addendum, ...]:
    """What was said of a coil after it was closed."""
    with store.reading() as connection:
        return facts_of(read(connection, COIL + head.id))


def said_of(store: Store, ids: Sequence[str]) -> dict[str, list[Addendum]]:
    """The same of many coils, by id; those of which nothing was said are not in it."""
    said: dict[str, list[Addendum]] = {}
    for at in range(0, len(ids), _AT_ONCE):
        with store.reading() as connection:
            said |= facts_by_log(connection, COIL, ids[at : at + _AT_ONCE])
    return said


def history(lessons: Iterable[CoilLesson], spools: Iterable[SpoolRecord]) -> tuple[Teaching, ...]:
    """All that teaches, in order of time: coils that are not withdrawn, and pieces measured from spools."""
    timed: list[tuple[float, int, str, Teaching]] = [
        (moment_of(one.began), 1, one.lesson.coil, one.lesson) for one in lessons if one.withdrawn is None
    ]
    for record in spools:
        for at, fact in enumerate(record.measured):
            piece = PieceMeasured(record.spool.id, fact.ohm_per_m, fact.rel)
            timed.append((moment_of(fact.wall_time), 0, f"{record.spool.id} {at:06d}", piece))
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
        if one.lesson.spool == record.spool.id and moment_of(one.began) >= moment_of(last.wall_time)
    )
    return left_on(record.spool, experience, Weighing(last.grams, last.grams_sd, since))
