"""Does one coil's record agree with itself? Pure: rows in, faults out.

Four things are compared, each with the one it stands on: the links with the rows they tie, the coil's row
with its first fact and its seal, the curve with the seal, all of them with a fold of the events. A row that
disagrees with its link is taken both ways for the next one, so that a single change, of the row or of the
link, gives a single fault at its place.
"""

from __future__ import annotations

import json
import math
import struct
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, fields

import windctl
from windctl.book.heads import NOT_JUDGED, OPEN, SEAL, SEALED_COLUMNS, CoilHead, coil_number, curve_digest
from windctl.book.queries import StoredRow, wrong_kind
from windctl.errors import RecordBroken
from windctl.record.chain import genesis, link
from windctl.record.curve import CurvePoint, review
from windctl.record.entries import Entry, unpack
from windctl.record.events import CoilStarted, Event, Resumed
from windctl.record.summary import summarise
from windctl.record.trace import trace_digest

# What facts that were not written by this program can do to the functions that follow them.
_UNFOLLOWABLE = (
    RecordBroken,
    ArithmeticError,
    AssertionError,
    AttributeError,
    LookupError,
    TypeError,
    ValueError,
    struct.error,
)

# A forecast folded again on another computer may differ in the last bits of its mathematics library.
_CLOSE = 1e-9


@dataclass(frozen=True, slots=True)
class Fault:
    """One thing that does not agree. `seq`: the row of the record, `None` where it is none of them."""

    seq: int | None
    what: str


def check_record(
    head: CoilHead, rows: Iterable[StoredRow], curve: Sequence[tuple[int, CurvePoint]]
) -> list[Fault]:
    """Everything that does not agree in one coil; empty when all is well.

    `rows` in order of seq, `curve` as (place, point) in order.
    """
    wrong = list(_wrong_kinds(head, curve))
    if wrong:
        return wrong
    walk = _Walk(head)
    for row in rows:
        walk.step(row)
    faults = [*walk.end()]
    if 0 not in {fault.seq for fault in faults}:
        faults += _row_against_start(head, walk.events[0] if walk.events else None)
    if walk.seal is not None or not walk.seal_altered:
        faults += _row_against_seal(head, walk.seal, curve)
    if not walk.faults and walk.events:
        faults += _against_fold(head, walk.entries, walk.events, [point for _, point in curve])
    return faults


class _Walk:
    """One pass along the chain."""

    def __init__(self, head: CoilHead) -> None:
        self._head = head
        self._last: tuple[bytes, ...] = (genesis(head.id),)  # what the next row may be tied to
        self._next = 0
        self.faults: list[Fault] = []
        self.events: list[Event] = []
        self.entries: list[Entry] = []
        self.seal: dict[str, object] | None = None
        self.seal_altered = False

    def step(self, row: StoredRow) -> None:
        entry = row.entry
        if self.seal is not None:
            self.faults.append(Fault(row.seq, f"row {row.seq} ({entry.kind}) comes after the seal"))
        if row.seq != self._next:
            what = f"row {self._next} is missing"
            if row.seq - self._next > 1:
                what = f"rows {self._next} to {row.seq - 1} are missing"
            self.faults.append(Fault(self._next, what))
            self._last = ()
        self._next = row.seq + 1
        if (name := wrong_kind(row)) is not None:
            self.faults.append(Fault(row.seq, f"row {row.seq} was altered: its {name} is of the wrong kind"))
            self._last = ()
            return
        ties = tuple(link(last, entry.kind, entry.payload) for last in self._last)
        if ties and row.link not in ties:
            what = f"row {row.seq} ({entry.kind!r}) was altered: it does not agree with its link"
            self.faults.append(Fault(row.seq, what))
            self._last = (row.link, *ties)
            self.seal_altered |= entry.kind == SEAL
            return
        self._last = (row.link,)
        self._read(row)

    def end(self) -> list[Fault]:
        head = self._head
        if self._next != head.n_entries:
            what = f"the record has {self._next} rows, the coil's row says {head.n_entries}"
            self.faults.append(Fault(self._next, what))
        if head.record_digest not in [last.hex() for last in self._last]:
            what = f"the record ends with another digest than the coil's row says, {head.record_digest!r}"
            self.faults.append(Fault(None, what))
        return self.faults

    def _read(self, row: StoredRow) -> None:
        entry = row.entry
        try:
            if entry.kind == SEAL:
                held: list[Event] = []
                self.seal = dict(json.loads(entry.payload))
            else:
                held = list(unpack([entry]))
        except (RecordBroken, ValueError, TypeError) as error:
            self.faults.append(Fault(row.seq, f"row {row.seq} ({entry.kind!r}) cannot be read: {error}"))
            return
        if len(held) != entry.events:
            what = f"row {row.seq} ({entry.kind!r}) holds {len(held)} events, it says {entry.events}"
            self.faults.append(Fault(row.seq, what))
        self.events += held
        if entry.kind != SEAL:
            self.entries.append(entry)


def _wrong_kinds(head: CoilHead, curve: Sequence[tuple[int, CurvePoint]]) -> Iterator[Fault]:
    """Values that no column may hold: SQLite itself does not keep texts out of number columns."""
    kinds = {"str": (str,), "int": (int,), "float": (float,)}
    for field in fields(head):
        allowed = kinds[str(field.type).removesuffix(" | None")]
        value = getattr(head, field.name)
        if not isinstance(value, allowed) and not (value is None and str(field.type).endswith("None")):
            yield Fault(None, f"{field.name} is {value!r}, which is of the wrong kind")
    for place, point in curve:
        for field in fields(point):
            if not isinstance(getattr(point, field.name), float):
                yield Fault(None, f"point {place} of the curve: {field.name} is of the wrong kind")


def _row_against_start(head: CoilHead, started: Event | None) -> Iterator[Fault]:
    if head.number != coil_number(head.bench, head.year, head.serial):
        parts = f"bench {head.bench!r}, year {head.year}, serial {head.serial}"
        yield Fault(None, f"the number {head.number!r} does not go with {parts}")
    if not isinstance(started, CoilStarted):
        yield Fault(0, "the record does not begin with the start of the coil")
        return
    said = {
        "id": started.coil_id,
        "number": started.number,
        "recipe": started.recipe_name,
        "recipe_digest": started.recipe_digest,
        "batch": started.batch,
        "of": started.of,
        "operator": started.operator,
        "started": started.wall_time,
        "target_kind": started.target.kind,
        "target_value": started.target.value,
        "program_digest": started.program_digest,
        "spool": started.spool,
    }
    yield from _differing(head, said, "its record says")


def _row_against_seal(
    head: CoilHead, seal: dict[str, object] | None, curve: Sequence[tuple[int, CurvePoint]]
) -> Iterator[Fault]:
    if seal is None:
        if head.sealed:
            yield Fault(None, "the coil is closed, but the seal of its record is missing")
        said: dict[str, object] = dict.fromkeys(SEALED_COLUMNS)
        said |= {"outcome": OPEN, "reason": "", "verdict": NOT_JUDGED}
        yield from _differing(head, said, "yet the record is not closed, which says")
        if curve:
            yield Fault(None, "there is a curve, yet the record is not closed")
        return
    yield from _differing(head, {name: seal.get(name) for name in SEALED_COLUMNS}, "its seal says")
    places = [place for place, _ in curve]
    if len(curve) != seal.get("curve_points") or places != list(range(len(curve))):
        yield Fault(None, f"the curve has {len(curve)} points, the seal says {seal.get('curve_points')}")
    elif curve_digest([point for _, point in curve]) != seal.get("curve_digest"):
        yield Fault(None, "the curve was altered: it does not agree with the seal")


def _against_fold(
    head: CoilHead, entries: list[Entry], events: list[Event], curve: list[CurvePoint]
) -> Iterator[Fault]:
    """The row and the curve once more, from the facts alone."""
    try:
        reviewed = review(events)
        summary = summarise(reviewed.state)
        trace = trace_digest(entries)
    except _UNFOLLOWABLE as error:
        yield Fault(None, f"the events cannot be followed: {type(error).__name__}: {error}")
        return
    if not head.sealed:
        return
    if summary.outcome == OPEN:
        yield Fault(None, f"outcome is {head.outcome!r}, yet no event ends the coil")
    said = {field.name: getattr(summary, field.name) for field in fields(summary)}
    yield from _differing(head, {**said, "trace_digest": trace}, "its events say")
    # Another version may forecast better; then the seal alone answers for the curve.
    versions = {event.version for event in events if isinstance(event, CoilStarted | Resumed)}
    if versions == {windctl.__version__}:
        yield from _differing_curve(curve, reviewed.curve)


def _differing_curve(curve: Sequence[CurvePoint], again: Sequence[CurvePoint]) -> Iterator[Fault]:
    if len(curve) != len(again):
        yield Fault(None, f"the curve has {len(curve)} points, its events give {len(again)}")
        return
    for place, (kept, made) in enumerate(zip(curve, again, strict=True)):
        for field in fields(CurvePoint):
            one, other = getattr(kept, field.name), getattr(made, field.name)
            if not math.isclose(one, other, rel_tol=_CLOSE, abs_tol=_CLOSE):
                yield Fault(
                    None, f"point {place} of the curve: {field.name} is {one}, its events give {other}"
                )
                return


def _differing(head: CoilHead, said: dict[str, object], who: str) -> Iterator[Fault]:
    for name, value in said.items():
        kept = getattr(head, name)
        if kept != value:
            yield Fault(None, f"{name} is {kept!r}, {who} {value!r}")
