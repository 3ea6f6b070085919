"""Does every stored byte still agree? One coil, or the whole book.

Safe beside a live writer: of each coil one state is taken, rows that come later are left for the next time.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, fields
from typing import Any

import sqlalchemy as sa

from windctl.book.check import Fault, check_record
from windctl.book.heads import CoilHead, coil_number
from windctl.book.imports import Imports, gaps, imports_in, recorded_head
from windctl.book.ledger import names
from windctl.book.lessons import IN_RECORD as OF_LESSON
from windctl.book.lessons import LessonRow, row_in, row_of
from windctl.book.logs import COIL, Log, LogFault, check_log, check_logs, decoded, facts_of, read
from windctl.book.pairs import check_pairs
from windctl.book.queries import HEAD_COLUMNS, StoredRow, curve_in, head_of, raw_rows
from windctl.book.store import Store
from windctl.book.tables import coils, curve, entries, ledger, lessons, numbers
from windctl.book.words import IN_RECORD, said_in, words_of, written_in
from windctl.errors import BookError, RecordBroken
from windctl.record.addenda import CoilImported
from windctl.record.curve import CurvePoint
from windctl.record.entries import Entry

BOOK = "book"  # stands for a coil where a fault is of none

_MOST_DAMAGE = 5  # messages of SQLite's own check


@dataclass(frozen=True, slots=True)
class BrokenCoil:
    """One thing found wrong.

    `coil`: its number, or "book". `event_seq`: the row of the coil's record, counted from 0; `None` where the
    fault is in none of them.
    """

    coil: str
    event_seq: int | None
    what: str

    def __str__(self) -> str:
        place = self.coil if self.event_seq is None else f"{self.coil}, row {self.event_seq}"
        return f"{place}: {self.what}"


@dataclass(frozen=True, slots=True)
class VerifyReport:
    """How many coils were checked, and all that was found wrong."""

    checked: int
    broken: tuple[BrokenCoil, ...]

    @property
    def good(self) -> bool:
        """True when nothing was found wrong."""
        return not self.broken


def verify_coils(store: Store, ids: Iterable[str], imports: Imports) -> VerifyReport:
    """Check these coils.

    Raises BookError when the book itself cannot be read.
    """
    checked = 0
    broken: list[BrokenCoil] = []
    for coil_id in ids:
        checked += 1
        broken += _coil(store, coil_id, imports.coils.get(coil_id))
    return VerifyReport(checked, tuple(broken))


def verify_book(store: Store) -> VerifyReport:
    """Check the file, the numbers allotted, and every coil.

    Raises BookError when the book itself cannot be read.
    """
    broken = list(_damage(store))
    with store.reading() as connection:
        steps = [tuple(row) for row in connection.execute(sa.select(ledger).order_by(ledger.c.version))]
        allotted = [tuple(row) for row in connection.execute(sa.select(numbers))]
        here = sa.select(coils.c.id, coils.c.bench, coils.c.year, coils.c.serial)
        present = [tuple(row) for row in connection.execute(here)]
        imports = imports_in(connection)
        ids = list(connection.scalars(sa.select(coils.c.id).order_by(coils.c.started, coils.c.number)))
        broken += _orphans(connection)
    if steps != names():
        broken.append(BrokenCoil(BOOK, None, f"the ledger of schemas was altered: it says {steps!r}"))
    broken += [*_gaps(allotted, present, imports), *_lost(imports, present)]
    report = verify_coils(store, ids, imports)
    return VerifyReport(report.checked, (*broken, *report.broken, *_logs(store)))


def verify_coil(store: Store, coil_id: str) -> VerifyReport:
    """Check one coil, and what was said of it since."""
    with store.reading() as connection:
        imports = imports_in(connection)
    report = verify_coils(store, [coil_id], imports)
    with store.reading() as connection:
        log = read(connection, f"{COIL}{coil_id}")
        number = connection.scalar(sa.select(coils.c.number).where(coils.c.id == coil_id))
    faults = [*(() if log is None else check_log(log)), *check_pairs(store, coil_id)]
    told = [_of_log(fault, {COIL + coil_id: str(number)}) for fault in faults]
    return VerifyReport(report.checked, (*report.broken, *told))


def _logs(store: Store) -> Iterator[BrokenCoil]:
    with store.reading() as connection:
        known = [tuple(row) for row in connection.execute(sa.select(coils.c.id, coils.c.number))]
    numbers_of = {COIL + str(coil_id): str(number) for coil_id, number in known}
    for fault in (*check_logs(store, [coil_id for coil_id, _ in known]), *check_pairs(store)):
        yield _of_log(fault, numbers_of)


def _of_log(fault: LogFault, numbers_of: dict[str, str]) -> BrokenCoil:
    """A fault in a log, told of its coil where it is a coil's."""
    row = "" if fault.seq is None else f"row {fault.seq} of "
    name = numbers_of.get(fault.log)
    if name is None:
        return BrokenCoil(BOOK, None, _printable(f"{row}the log {fault.log!r}: {fault.what}"))
    return BrokenCoil(
        _printable(name), None, _printable(f"{row}what was said since it was closed: {fault.what}")
    )


def _coil(store: Store, coil_id: str, imported: CoilImported | None) -> Iterator[BrokenCoil]:
    name = coil_id
    try:
        one = _snapshot(store, coil_id)
        head, name = one.head, one.head.number
        stop = head.n_entries if isinstance(head.n_entries, int) else one.n_rows
        written: list[Entry] = []
        rows = _noticing(raw_rows(store, coil_id, stop), written)
        faults = check_record(_as_recorded(head, imported), rows, one.points)
        if imported is not None and head.number != imported.number:
            what = f"number is {head.number!r}, it was imported as {imported.number!r}"
            faults.append(Fault(None, what))
        if one.n_rows > stop:
            faults.append(Fault(stop, f"the record has {one.n_rows} rows, the coil's row says {stop}"))
        if not faults:  # else its words could not be told either
            faults += _against_words(one, written)
            faults += _against_lesson(one, written, imported)
    except (BookError, RecordBroken) as error:
        faults = [Fault(None, f"cannot be read: {error}")]
    for fault in faults:
        yield BrokenCoil(_printable(name), fault.seq, fault.what)


def _noticing(rows: Iterable[StoredRow], written: list[Entry]) -> Iterator[StoredRow]:
    """The same rows; those that the coil's words and its lesson follow from are put into `written` on the
    way."""
    for row in rows:
        if row.seq == 0 or row.entry.kind in (*IN_RECORD, *OF_LESSON):
            written.append(row.entry)
        yield row


def _against_words(one: _Snapshot, written: Iterable[Entry]) -> Iterator[Fault]:
    """What is searched, once more from what people wrote."""
    try:
        texts = (*written_in(written), *said_in(facts_of(one.log)))
    except RecordBroken:
        return  # told where the log is checked
    said = words_of(one.head.recipe, one.head.number, texts)
    if one.words != said:
        yield Fault(None, f"words is {one.words!r}, its record and what was said since give {said!r}")


def _against_lesson(
    one: _Snapshot, record: Iterable[Entry], imported: CoilImported | None
) -> Iterator[Fault]:
    """What plans find its lesson by, once more from record and log."""
    again = None
    if one.head.sealed:
        silent = imported is not None and not imported.teaches
        again = row_of(one.head.started, one.head.bench, record, decoded(one.log), silent=silent)
    if one.lesson == again:
        return
    if one.lesson is None or again is None:
        is_there = "there is none" if one.lesson is None else "there is one, and the coil is open"
        yield Fault(None, f"its row among the lessons: {is_there}")
        return
    for field in fields(again):
        kept, said = getattr(one.lesson, field.name), getattr(again, field.name)
        if kept != said:
            what = f"{field.name} is {kept!r}, its record and what was said since give {said!r}"
            yield Fault(None, f"its row among the lessons: {what}")


@dataclass(frozen=True, slots=True)
class _Snapshot:
    """A coil's row, its words, its row among the lessons, its curve, how many rows its record has, and its
    log, all of one moment."""

    head: CoilHead
    words: object
    lesson: LessonRow | None
    points: list[tuple[int, CurvePoint]]
    n_rows: int
    log: Log | None


def _as_recorded(head: CoilHead, imported: CoilImported | None) -> CoilHead:
    """The row with the number that the record has, where an imported coil is called otherwise here."""
    if imported is None or imported.recorded == imported.number or head.number != imported.number:
        return head
    if head.number != coil_number(head.bench, head.year, head.serial):
        return head  # told as it is
    return recorded_head(head, imported.recorded)


def _snapshot(store: Store, coil_id: str) -> _Snapshot:
    with store.reading() as connection:
        row = connection.execute(sa.select(*HEAD_COLUMNS, coils.c.words).where(coils.c.id == coil_id)).one()
        rows = sa.select(sa.func.count()).select_from(entries).where(entries.c.coil == coil_id)
        n_rows, log = int(connection.scalar(rows) or 0), read(connection, f"{COIL}{coil_id}")
        lesson, points = row_in(connection, coil_id), curve_in(connection, coil_id)
        return _Snapshot(head_of(row), row.words, lesson, points, n_rows, log)


def _damage(store: Store) -> Iterator[BrokenCoil]:
    """What SQLite itself finds wrong with the file's structure."""
    try:
        with store.bare() as connection:
            said = [str(row[0]) for row in connection.execute(f"PRAGMA integrity_check({_MOST_DAMAGE})")]
    except BookError as error:
        said = [str(error)]
    for text in said:
        if text != "ok":
            yield BrokenCoil(BOOK, None, f"the file is damaged: {text}")


def _orphans(connection: sa.Connection) -> Iterator[BrokenCoil]:
    """Rows that belong to no coil."""
    kinds = ((entries, "rows of a record"), (curve, "points of a curve"), (lessons, "rows among the lessons"))
    for table, what in kinds:
        known = sa.select(coils.c.id)
        query = (
            sa.select(table.c.coil, sa.func.count()).where(table.c.coil.not_in(known)).group_by(table.c.coil)
        )
        for coil, n in connection.execute(query):
            yield BrokenCoil(_printable(coil), None, f"{n} {what} belong to no coil in the book")


def _gaps(
    allotted: Iterable[tuple[Any, Any, Any]],
    present: Iterable[tuple[Any, Any, Any, Any]],
    imports: Imports,
) -> Iterator[BrokenCoil]:
    """Numbers that were given to a coil which is not here. `allotted`: (bench, year, last serial number);
    `present`: (id, bench, year, serial number)."""
    last = {(bench, year): serial for bench, year, serial in allotted}
    taken: dict[tuple[str, int], list[tuple[int, int]]] = {key: [] for key in last}
    own: dict[tuple[str, int], int] = {}
    for coil, bench, year, serial in present:
        if isinstance(serial, int):  # else the coil's own check says so
            taken.setdefault((bench, year), []).append((serial, serial))
            if coil not in imports.coils:
                own[bench, year] = max(serial, own.get((bench, year), 0))
    for one in imports.passed:
        taken.setdefault((one.bench, one.year), []).append((one.first, one.last))
    for (bench, year), here in taken.items():
        highest = own.get((bench, year), 0)
        count = last.get((bench, year), 0)
        if not isinstance(count, int) or count < highest:
            what = (
                f"bench {bench!r}, {year}: {highest} numbers are in use, the count of numbers says "
                f"{last.get((bench, year))!r}"
            )
            yield BrokenCoil(BOOK, None, what)
            count = highest
        for first, upto in gaps(here, 1, count):
            yield _missing(bench, year, first, upto)


def _lost(imports: Imports, present: Iterable[tuple[Any, Any, Any, Any]]) -> Iterator[BrokenCoil]:
    """Imported coils that are not here any more."""
    here = {coil for coil, *_ in present}
    for coil, fact in imports.coils.items():
        if coil not in here:
            what = f"missing: it was imported {fact.wall_time}, and is not in the book (id {coil})"
            yield BrokenCoil(_printable(fact.number), None, what)


def _missing(bench: str, year: int, first: int, last: int) -> BrokenCoil:
    what = "missing: the number was allotted, but its coil is not in the book"
    if last > first:
        upto = coil_number(bench, year, last)
        what = f"missing: this and all up to {upto} were allotted, but their coils are not in the book"
    return BrokenCoil(_printable(coil_number(bench, year, first)), None, what)


def _printable(text: object) -> str:
    return str(text).encode("utf-8", "backslashreplace").decode()
