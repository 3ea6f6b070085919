"""Which closed coils teach, and what: a narrow row for each, in the words that a plan asks by.

A plan of the 50 000th coil does not read what all others taught. It hears every coil of the spool that is
meant, the `RECENT` coils that were begun last, and the last `ABOUT` that are about each other thing asked
for: the lay, the kind of bobbin, the style, the bench. All of it stays a fold over lessons, and a withdrawn
coil is as one never wound: the next older one is heard in its stead.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import asdict, dataclass, replace
from datetime import UTC, datetime
from typing import Any

import sqlalchemy as sa

from windctl.book.logs import COIL, decoded, facts_by_log, read
from windctl.book.store import Store
from windctl.book.tables import coils, entries, lessons
from windctl.errors import RecordBroken
from windctl.plan.experience.gaussian import Name
from windctl.plan.experience.lesson import Lesson
from windctl.record.addenda import Addendum, CoilMeasured, CoilTaught, withdrawn
from windctl.record.canonical import decode
from windctl.record.entries import Entry
from windctl.record.events import BoardGreeted, CoilStarted
from windctl.record.lesson import simulated

RECENT = 200  # of all coils of a kind, real or simulated, those begun last
ABOUT = 100  # further ones for each unknown that is asked about

TOLD, UNTOLD, WITHDRAWN, SILENT, NOTHING = "told", "untold", "withdrawn", "silent", "nothing"

# What of a record a row follows from, besides its first fact.
IN_RECORD = (BoardGreeted.kind,)

_COLUMN = {
    "level": lessons.c.spool,
    "core": lessons.c.bobbin,
    "lay": lessons.c.lay,
    "style": lessons.c.style,
    "meter": lessons.c.bench,
}

_BEGUN = sa.select(coils.c.id, coils.c.number, coils.c.started, coils.c.outcome)
_AT_ONCE = 500  # values in one statement

Reader = Callable[[str], Lesson | None]  # by coil id: the lesson as its record has it


@dataclass(frozen=True, slots=True)
class CoilLesson:
    """A sealed coil as a teacher: `lesson` with whatever was measured by hand since."""

    began: str
    lesson: Lesson
    withdrawn: str | None  # the reason, where it shall not teach


@dataclass(frozen=True, slots=True)
class LessonRow:
    """What the table keeps of one closed coil.

    began     seconds since 1970, since benches' clocks may have different offsets
    teaches   1 or 0
    how       told (the lesson stands in the coil's log), untold (it was not written down, and is read from
              the record), withdrawn, silent (imported to be looked at only), nothing (the record does not say
              what to compare the coil with)
    """

    began: float
    teaches: int
    how: str
    simulated: int = 0
    bench: str = ""
    spool: str = ""
    bobbin: str = ""
    lay: str = ""
    style: str = ""


def row_of(
    began: str, bench: str, record: Iterable[Entry], said: Sequence[Addendum], *, silent: bool
) -> LessonRow:
    """The row of a closed coil. `record`: its first entry, and those of `IN_RECORD`."""
    moment = moment_of(began)
    taught = next((fact.lesson for fact in reversed(said) if isinstance(fact, CoilTaught)), None)
    if taught is not None:  # which is nearly always so: then the record need not be read
        basis, bench, spool, unreal = taught.basis, taught.bench, taught.spool, taught.simulated
    else:
        facts = [fact for entry in record if (fact := _readable(entry)) is not None]
        started = facts[0] if facts else None
        if not isinstance(started, CoilStarted) or started.basis is None:
            return LessonRow(moment, 0, SILENT if silent else NOTHING)
        basis, spool, unreal = started.basis, started.spool, simulated(facts)
    how = TOLD if taught is not None else UNTOLD
    if silent or withdrawn(said) is not None:
        how = SILENT if silent else WITHDRAWN
    teaches = int(how in (TOLD, UNTOLD))
    return LessonRow(moment, teaches, how, int(unreal), bench, spool, basis.bobbin, basis.lay, basis.style)


def _readable(entry: Entry) -> CoilStarted | BoardGreeted | None:
    """A row that cannot be read says nothing here: `verify` tells."""
    try:
        fact = decode(entry.kind, entry.payload)
    except RecordBroken:
        return None
    return fact if isinstance(fact, CoilStarted | BoardGreeted) else None


def keep_row(connection: sa.Connection, coil: str, *, silent: bool | None = None) -> None:
    """Make the row of a closed coil what record and log now say. In a transaction that writes.

    `silent`: whether it was imported to be looked at only; None: as before.
    """
    head = connection.execute(sa.select(coils.c.started, coils.c.bench).where(coils.c.id == coil)).one()
    before = connection.scalar(sa.select(lessons.c.how).where(lessons.c.coil == coil))
    said = decoded(read(connection, COIL + coil))
    silent = before == SILENT if silent is None else silent
    row = row_of(head.started, head.bench, _record(connection, coil), said, silent=silent)
    if before is not None:
        connection.execute(sa.delete(lessons).where(lessons.c.coil == coil))
    connection.execute(sa.insert(lessons), [{"coil": coil, **asdict(row)}])


def _record(connection: sa.Connection, coil: str) -> Iterator[Entry]:
    """What `row_of` wants of a record, read when it is asked for."""
    wanted = sa.or_(entries.c.seq == 0, entries.c.kind.in_(IN_RECORD))
    query = sa.select(entries.c.kind, entries.c.payload, entries.c.events)
    query = query.where(entries.c.coil == coil, wanted).order_by(entries.c.seq)
    yield from (Entry(*each) for each in connection.execute(query))


def row_in(connection: sa.Connection, coil: str) -> LessonRow | None:
    """The row of a coil as stored: in a spoilt file any value may be of any kind."""
    found = connection.execute(sa.select(lessons).where(lessons.c.coil == coil)).one_or_none()
    return None if found is None else LessonRow(*found[1:])


def every(store: Store, reader: Reader) -> tuple[CoilLesson, ...]:
    """What every closed coil teaches, in the order in which they were begun, the withdrawn ones too.
    Imported coils are among them only where they are to teach here."""
    with store.reading() as connection:
        ids = set(connection.scalars(sa.select(lessons.c.coil).where(_heard())))
        rows = [row for row in connection.execute(_BEGUN) if row.id in ids]
        said = facts_by_log(connection, COIL)
    return _lessons(rows, said, reader)


def heard(
    store: Store, about: Iterable[Name], *, unreal: bool, reader: Reader, also: Iterable[str] = ()
) -> tuple[CoilLesson, ...]:
    """What coils teach of the unknowns `about`, in the order in which they were begun.

    Of each spool in `about` all coils, the withdrawn ones too; of others as the top of this file says. Real
    or simulated (`unreal`) ones only. `also`: ids of further coils, if they have a lesson.
    """
    kind = lessons.c.simulated == int(unreal)
    ids: set[str] = set()
    asked = {(what, thing) for what, thing in about if what in _COLUMN and thing}
    with store.reading() as connection:
        for what, thing in sorted(asked):
            which = (kind, _COLUMN[what] == thing)
            if what == "level":
                ids |= set(connection.scalars(sa.select(lessons.c.coil).where(*which, _heard())))
            else:
                ids |= _latest(connection, ABOUT, *which)
        ids |= _latest(connection, RECENT, kind)
        for some in _parts(also):
            query = sa.select(lessons.c.coil).where(kind, lessons.c.coil.in_(some), _heard())
            ids |= set(connection.scalars(query))
        rows: list[Any] = []
        said: dict[str, list[Addendum]] = {}
        for some in _parts(sorted(ids)):
            rows += connection.execute(_BEGUN.where(coils.c.id.in_(some)))
            said |= facts_by_log(connection, COIL, some)
    return _lessons(rows, said, reader)


def kinds_of(store: Store, spool: str) -> set[bool]:
    """Whether coils of this spool are simulated: which of the two there are."""
    query = sa.select(lessons.c.simulated).where(lessons.c.spool == spool, _heard()).distinct()
    with store.reading() as connection:
        return {bool(one) for one in connection.scalars(query)}


def _heard() -> sa.ColumnElement[bool]:
    return lessons.c.how.in_((TOLD, UNTOLD, WITHDRAWN))


def _latest(connection: sa.Connection, most: int, *which: sa.ColumnElement[bool]) -> set[str]:
    query = sa.select(lessons.c.coil).where(*which, lessons.c.teaches == 1)
    last = query.order_by(lessons.c.began.desc(), lessons.c.coil.desc()).limit(most)
    return set(connection.scalars(last))


def _parts(ids: Iterable[str]) -> Iterator[list[str]]:
    """As many as one statement takes."""
    every = list(ids)
    for at in range(0, len(every), _AT_ONCE):
        yield every[at : at + _AT_ONCE]


def _lessons(
    rows: Iterable[Any], said: Mapping[str, Sequence[Addendum]], reader: Reader
) -> tuple[CoilLesson, ...]:
    """The lessons of coils (rows of `_BEGUN`), in the order in which they were begun."""
    found = []
    for coil, _, started, outcome in sorted(rows, key=lambda row: (moment_of(row[2]), row[1])):
        facts = said.get(coil, ())
        taught = [fact.lesson for fact in facts if isinstance(fact, CoilTaught)]
        lesson = taught[-1] if taught else reader(coil)
        if lesson is not None:
            out = withdrawn(facts)
            if outcome == "finished":
                lesson = _with_hand(lesson, facts)
            found.append(CoilLesson(started, lesson, None if out is None else out.reason))
    return tuple(found)


def _with_hand(lesson: Lesson, facts: Iterable[Addendum]) -> Lesson:
    by_hand = tuple(one for fact in facts if isinstance(fact, CoilMeasured) for one in fact.measured)
    return replace(lesson, measured=(*lesson.measured, *by_hand))


def moment_of(text: Any) -> float:
    """Seconds for ordering texts of time with different offsets; what is no time comes first."""
    try:
        moment = datetime.fromisoformat(text)
        return (moment if moment.tzinfo is not None else moment.replace(tzinfo=UTC)).timestamp()
    except (ValueError, TypeError, OverflowError):
        return 0.0
