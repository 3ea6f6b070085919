"""The coil book as the rest of the program sees it."""

from __future__ import annotations

import re
import uuid
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from types import TracebackType

import sqlalchemy as sa

from windctl.book.claims import Claim, claimed, held_against
from windctl.book.exchange import Hand, Taken, lines_of, take_in
from windctl.book.export import Restored, exported, shown
from windctl.book.heads import CoilHead, coil_number, head_columns, opened
from windctl.book.imports import imports_in, next_serial
from windctl.book.lease import Lease
from windctl.book.lessons import CoilLesson, every, heard, kinds_of
from windctl.book.pairs import make_pairs, part_pair, stock_facts
from windctl.book.queries import (
    HEAD_COLUMNS,
    CoilLine,
    Which,
    counted,
    curve_in,
    found,
    head_of,
    lines,
    listed,
    record_entries,
    starts_of,
    stored_rows,
)
from windctl.book.query import parse, sorted_by
from windctl.book.shelf import (
    SpoolRecord,
    add_spool,
    add_to_spool,
    addenda_in,
    amend,
    said_of,
    spool_in,
    spools_in,
)
from windctl.book.store import Store
from windctl.book.tables import coils, entries
from windctl.book.verify import BrokenCoil, VerifyReport, verify_book, verify_coil
from windctl.book.words import first_words
from windctl.book.writer import CoilWriter
from windctl.errors import BookError, RecordBroken
from windctl.plan.experience.gaussian import Name
from windctl.plan.experience.lesson import Lesson
from windctl.record.addenda import Addendum, CoilImported, PairMade, SpoolAdded
from windctl.record.canonical import decode, encode
from windctl.record.chain import genesis, link
from windctl.record.curve import CurvePoint
from windctl.record.entries import Entry, unpack
from windctl.record.events import CoilStarted, Event
from windctl.record.lesson import lesson_of

_BENCH = re.compile(r"[a-z0-9]{1,8}")


class Book:
    """One coil book. Coils are named by number, by the number's last digits, or by the beginning of the id.

    May be used from several threads, and beside other processes that use the same file. Everything raises
    BookError when the file cannot be read or written, or holds no such coil.
    """

    def __init__(self, store: Store) -> None:
        self._store = store

    @property
    def path(self) -> Path:
        """Where the book lies."""
        return self._store.path

    def close(self) -> None:
        """Close the file."""
        self._store.close()

    def __enter__(self) -> Book:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    def begin_coil(self, bench: str, year: int, started: CoilStarted) -> CoilWriter:
        """Allot the next number of `bench` in `year` and record `started` under it as the coil's first fact.

        `started.number` is replaced; the writer's `started` is the fact as recorded, and durable already.
        Two processes never get the same number.
        """
        _check_new(bench, year, started)
        with self._store.atomic() as connection:
            serial = next_serial(connection, bench, year)
            started = replace(started, number=coil_number(bench, year, serial))
            payload = _first_payload(started)
            tie = link(genesis(started.coil_id), started.kind, payload)
            head = opened(started, bench, year, serial, tie)
            if connection.scalar(sa.select(coils.c.number).where(coils.c.id == head.id)) is not None:
                raise BookError(f"the coil book {self.path} already has a coil with the id {head.id}")
            words = first_words(head.recipe, head.number)
            connection.execute(sa.insert(coils), [{**head_columns(head), "words": words}])
            first = {"coil": head.id, "seq": 0, "kind": started.kind, "events": 1}
            connection.execute(sa.insert(entries), [{**first, "payload": payload, "link": tie}])
        lease = Lease(self.path, started.coil_id, started.number)
        lease.take()
        return CoilWriter(self._store, lease, head, started)

    def reopen(self, coil: str) -> CoilWriter:
        """Go on with an open coil where its record ends.

        Raises BookError when it is closed or another writer is alive, RecordBroken when its chain is damaged.
        """
        head = self.find(coil)
        lease = Lease(self.path, head.id, head.number)
        lease.take()
        try:
            head = self._again(head)  # as the last writer left it
            _refuse_closed(head)
            return CoilWriter(self._store, lease, head, self._checked_start(head))
        except BaseException:
            lease.release()
            raise

    def find(self, text: str) -> CoilHead:
        """The one coil that `text` names."""
        return found(self._store, text)

    def list(
        self,
        query: str = "",
        *,
        sort: str = "",
        bench: str | None = None,
        recipe: str | None = None,
        batch: str | None = None,
        outcome: str | None = None,
        verdict: str | None = None,
        spool: str | None = None,
        limit: int | None = None,
        offset: int = 0,
    ) -> tuple[CoilHead, ...]:
        """Coils that `query` asks for (`windctl.book.query`) and whose row has these very values.

        Sorted by `sort`, fields with commas between, else as the query says, else the one started last first
        (by the text of its time); a page with `limit` and `offset`. Raises QueryError.
        """
        which = Which(parse(query), bench, recipe, batch, outcome, verdict, spool=spool)
        return listed(self._store, which, limit, offset, sorted_by(sort))

    def lines(
        self,
        query: str = "",
        *,
        sort: str = "",
        recipe: str | None = None,
        batch: str | None = None,
        outcome: str | None = None,
        limit: int | None = None,
    ) -> tuple[CoilLine, ...]:
        """The same coils as `list` has, of each what a list shows: quick where there are very many."""
        which = Which(parse(query), recipe=recipe, batch=batch, outcome=outcome)
        return lines(self._store, which, limit, sorted_by(sort))

    def count(
        self,
        query: str = "",
        *,
        bench: str | None = None,
        recipe: str | None = None,
        batch: str | None = None,
        outcome: str | None = None,
        verdict: str | None = None,
    ) -> int:
        """How many coils `list` has in all its pages. Raises QueryError."""
        return counted(self._store, Which(parse(query), bench, recipe, batch, outcome, verdict))

    def open_coils(self, bench: str | None = None) -> tuple[CoilHead, ...]:
        """Coils whose record is not closed, the one started last first."""
        return listed(self._store, Which(bench=bench, sealed=False), None, 0)

    def entries(self, coil: str) -> Iterator[Entry]:
        """The rows that hold the coil's events, in order, as far as they are recorded when this is asked."""
        return record_entries(self._store, self.find(coil))

    def events(self, coil: str) -> Iterator[Event]:
        """The coil's events, in order.

        Raises RecordBroken on the way when a row cannot be read.
        """
        return unpack(self.entries(coil))

    def curve(self, coil: str) -> tuple[CurvePoint, ...]:
        """The coil's curve, at most 500 points; empty as long as the coil is open."""
        head = self.find(coil)
        with self._store.reading() as connection:
            return tuple(point for _, point in curve_in(connection, head.id))

    def show(self, coil: str) -> Mapping[str, object]:
        """What is known of a coil as plain data: its row, its events, its curve."""
        return shown(self._store, self.find(coil))

    def export(self, coil: str) -> Mapping[str, object]:
        """`show`, and every row of the record with its digests: enough to check and restore the coil."""
        return exported(self._store, self.find(coil))

    def export_lines(self, heads: Sequence[CoilHead]) -> Iterator[bytes]:
        """A file of these coils, line by line, for `coils_in` and `take_in` of another book."""
        return lines_of(self._store, heads)

    def take_in(self, coil: Restored, hand: Hand) -> Taken:
        """Import a coil, as `coil_of` gives it.

        Raises BookError when it is open, or the book has another one under the same id; nothing was changed.
        """
        return take_in(self._store, coil, hand)

    def imported(self, coil: str) -> CoilImported | None:
        """How a coil came here from another book; None where it was wound into this one."""
        head = self.find(coil)
        with self._store.reading() as connection:
            return imports_in(connection).coils.get(head.id)

    def amend(self, coil: str, *facts: Addendum) -> None:
        """Say something of a closed coil: its record stays as it is. Raises BookError for an open one."""
        amend(self._store, [(self.find(coil), facts)])

    def amend_each(self, said: Sequence[tuple[str, Sequence[Addendum]]]) -> None:
        """`amend` for several coils (name, facts), all of it or nothing: what is said of a pair, say."""
        amend(self._store, [(self.find(coil), facts) for coil, facts in said])

    def make_pairs(self, pairs: Sequence[Sequence[tuple[str, PairMade]]]) -> None:
        """Keep pairs, each as both coils' names and what their logs say; all or none. Raises BookError where
        a coil has a partner already."""
        make_pairs(self._store, [tuple((self.find(coil), fact) for coil, fact in pair) for pair in pairs])

    def part_pair(self, coil: str, wall_time: str, by: str, reason: str) -> str:
        """Part a coil from its partner, whose number is returned. Raises BookError where it has none."""
        return part_pair(self._store, self.find(coil), wall_time, by, reason)

    def stock_facts(self) -> Mapping[str, Sequence[Addendum]]:
        """By coil id: what was measured, withdrawn, paired, parted, and said of magnets, in order."""
        return stock_facts(self._store)

    def addenda(self, coil: str) -> tuple[Addendum, ...]:
        """What was said of a coil after it was closed, in order."""
        return addenda_in(self._store, self.find(coil))

    def said_of(self, heads: Sequence[CoilHead]) -> Mapping[str, Sequence[Addendum]]:
        """The same of many coils at once, by id; those of which nothing was said are not in it."""
        return said_of(self._store, [head.id for head in heads])

    def starts_of(self, heads: Sequence[CoilHead]) -> Iterator[tuple[str, CoilStarted]]:
        """The first facts of many coils, each with the coil's id, in any order."""
        return starts_of(self._store, [head.id for head in heads])

    def add_spool(self, added: SpoolAdded, *more: Addendum) -> None:
        """Keep a new spool. Raises BookError when there is one of that name."""
        add_spool(self._store, (added, *more))

    def add_to_spool(self, spool: str, *facts: Addendum) -> None:
        """Keep more about a spool. Raises BookError when there is none of that name."""
        add_to_spool(self._store, spool, facts)

    def spools(self) -> tuple[SpoolRecord, ...]:
        """All spools, in order of their names."""
        return spools_in(self._store)

    def spool(self, name: str) -> SpoolRecord:
        """One spool. Raises BookError when there is none of that name."""
        return spool_in(self._store, name)

    def lessons(self) -> tuple[CoilLesson, ...]:
        """What every closed coil teaches, in the order in which they were begun, the withdrawn ones too."""
        return every(self._store, self._lesson)

    def heard(
        self, about: Iterable[Name], *, simulated: bool, also: Iterable[str] = ()
    ) -> tuple[CoilLesson, ...]:
        """Of these lessons those that a plan hears (`windctl.book.lessons`) which asks for the unknowns
        `about`; of the spools among them all. `also`: ids of further coils."""
        return heard(self._store, about, unreal=simulated, reader=self._lesson, also=also)

    def kinds_of(self, spool: str) -> set[bool]:
        """Whether the coils of a spool are simulated: which of the two there are."""
        return kinds_of(self._store, spool)

    def verify(self, coil: str | None = None) -> VerifyReport:
        """Check one coil, or all of them and the book as a whole, against the chains of digests."""
        if coil is None:
            return verify_book(self._store)
        return verify_coil(self._store, self.find(coil).id)

    def check_claim(self, claim: Claim, where: str) -> VerifyReport:
        """Check the coil that a report, a label or a file tells of, and that it is the one told of.

        `where`: stands for the coil where the book has none such.
        """
        coil_id = claimed(self._store, claim)
        if coil_id is None:
            what = "no record of this book is the one told of: it is missing, or was exchanged"
            return VerifyReport(0, (BrokenCoil(where, None, what),))
        report = verify_coil(self._store, coil_id)
        if report.broken:
            return report
        return VerifyReport(report.checked, tuple(held_against(self._store, self.find(coil_id), claim)))

    def _lesson(self, coil: str) -> Lesson | None:
        return lesson_of(list(self.events(coil)), self.find(coil).bench)

    def _again(self, head: CoilHead) -> CoilHead:
        with self._store.reading() as connection:
            return head_of(connection.execute(sa.select(*HEAD_COLUMNS).where(coils.c.id == head.id)).one())

    def _checked_start(self, head: CoilHead) -> CoilStarted:
        """The coil's first fact, when all links from there to the end agree."""
        last, n, started = genesis(head.id), 0, None
        for row in stored_rows(self._store, head.id, head.n_entries):
            last = link(last, row.entry.kind, row.entry.payload)
            if row.seq != n or row.link != last:
                break
            if n == 0:
                started = decode(row.entry.kind, row.entry.payload)
            n += 1
        if n != head.n_entries or last.hex() != head.record_digest or not isinstance(started, CoilStarted):
            raise RecordBroken(
                f"the record of coil {head.number} is damaged at row {n}: it cannot be continued; "
                "'windctl coils verify' says more"
            )
        return started


def _refuse_closed(head: CoilHead) -> None:
    if head.sealed:
        raise BookError(f"coil {head.number} is closed ({head.outcome}): nothing can be added to its record")


def _first_payload(started: CoilStarted) -> bytes:
    try:
        return encode(started)
    except ValueError as error:  # a text that is no text, a number that is none
        raise BookError(f"the start of the coil cannot be recorded: {error}") from error


def _check_new(bench: str, year: int, started: CoilStarted) -> None:
    if not _BENCH.fullmatch(bench):
        raise BookError(
            f"the bench is {bench!r}, it must be 1 to 8 of a-z and 0-9: change it in the machine profile"
        )
    if not 2000 <= year <= 9999:
        raise BookError(f"the year is {year}, outside 2000 to 9999: set the computer's clock")
    if not 0 <= started.of < 1_000_000:
        raise BookError(f"the batch is to have {started.of} coils, outside 0 (not counted) to 999 999")
    try:
        proper = str(uuid.UUID(started.coil_id)) == started.coil_id
    except ValueError:
        proper = False
    if not proper:
        raise BookError(f"the coil's id is {started.coil_id!r}, it must be a UUID in lower case")
