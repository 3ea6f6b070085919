"""Events as rows. A rare fact is a row of its own; runs of dense facts become chunks of about half a second.

A chunk is, zlib-packed, a header line (the number of its form, a letter for each event: s status, r reading)
and columns of zigzag varints: the first value, then differences. Nothing is rounded: unpacking gives the same
events. Chunks end where the board's clock passes a multiple of 500 ticks and before every rare fact, so order
is kept and the cut depends on facts alone, not on how fast the host happened to run.
"""

from __future__ import annotations

import zlib
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass

from windctl.errors import RecordBroken
from windctl.protocol.messages import Reading, Status
from windctl.record.canonical import decode, encode
from windctl.record.events import DENSE, Event, ReadingTaken, StatusHeard

CHUNK_TICKS = 500
CHUNK = "chunk"


@dataclass(frozen=True, slots=True)
class Form:
    """The columns of a chunk, in order; each list is preceded by its `at_ms`. A form never changes."""

    status: tuple[str, ...]
    reading: tuple[str, ...]


# A message that gets another field gets another form here; the old ones stay, so that old books can be read.
FORMS = {
    1: Form(
        status=(
            "ticks",
            "boot",
            "epoch",
            "state",
            "cause",
            "trip",
            "trust",
            "inputs",
            "count",
            "guide",
            "stop_point",
            "next",
            "executing",
            "program_crc",
            "speed",
            "tension",
            "celsius",
            "bad_frames",
        ),
        reading=("ticks", "count", "value", "window", "celsius", "flags"),
    ),
}
NEWEST = max(FORMS)


@dataclass(frozen=True, slots=True)
class Entry:
    """One row of a coil's record: a rare event, or a chunk of dense ones."""

    kind: str
    payload: bytes
    events: int


class Packer:
    """Turns a stream of events into entries; holds back at most one unfinished chunk."""

    def __init__(self) -> None:
        self._dense: list[StatusHeard | ReadingTaken] = []
        self._slot = -1

    def add(self, events: Iterable[Event]) -> list[Entry]:
        """The entries that are complete after these events."""
        entries: list[Entry] = []
        for event in events:
            if isinstance(event, DENSE):
                slot = _ticks(event) // CHUNK_TICKS
                if self._dense and slot != self._slot:
                    entries.append(self._close())
                self._slot = slot
                self._dense.append(event)
            else:
                if self._dense:
                    entries.append(self._close())
                entries.append(Entry(event.kind, encode(event), 1))
        return entries

    def flush(self) -> list[Entry]:
        """The unfinished chunk, if there is one."""
        return [self._close()] if self._dense else []

    def _close(self) -> Entry:
        entry = Entry(CHUNK, _pack(self._dense), len(self._dense))
        self._dense = []
        return entry


def unpack(entries: Iterable[Entry]) -> Iterator[Event]:
    """The events of a sequence of entries, in order.

    Raises RecordBroken for a row that holds no event.
    """
    for entry in entries:
        if entry.kind == CHUNK:
            yield from _unpack(entry.payload)
        else:
            yield decode(entry.kind, entry.payload)


def chunk_bytes(entry: Entry) -> bytes:
    """What a chunk holds, whatever packed it.

    Raises RecordBroken when it cannot be unpacked.
    """
    try:
        return zlib.decompress(entry.payload)
    except zlib.error as error:
        raise RecordBroken(f"a stored chunk of readings cannot be read: {error}") from error


def _ticks(event: StatusHeard | ReadingTaken) -> int:
    return event.status.ticks if isinstance(event, StatusHeard) else event.reading.ticks


def _pack(events: Sequence[StatusHeard | ReadingTaken]) -> bytes:
    statuses = [event for event in events if isinstance(event, StatusHeard)]
    readings = [event for event in events if isinstance(event, ReadingTaken)]
    order = "".join("s" if isinstance(event, StatusHeard) else "r" for event in events)
    columns = bytearray()
    _put_column(columns, [event.at_ms for event in statuses])
    for name in FORMS[NEWEST].status:
        _put_column(columns, [getattr(event.status, name) for event in statuses])
    _put_column(columns, [event.at_ms for event in readings])
    for name in FORMS[NEWEST].reading:
        _put_column(columns, [getattr(event.reading, name) for event in readings])
    return zlib.compress(f"{NEWEST} {order}\n".encode() + bytes(columns), 6)


def _unpack(payload: bytes) -> Iterator[Event]:
    try:
        header, _, columns = zlib.decompress(payload).partition(b"\n")
        number, _, order = header.decode("ascii").partition(" ")
        form = FORMS[int(number)]
        at = 0
        table: dict[str, list[list[int]]] = {}
        for letter, names in (("s", form.status), ("r", form.reading)):
            table[letter] = []
            for _ in range(1 + len(names)):
                column, at = _take_column(columns, at, order.count(letter))
                table[letter].append(column)
        statuses = (
            StatusHeard(at_ms, Status(**dict(zip(form.status, row, strict=True))))
            for at_ms, *row in zip(*table["s"], strict=True)
        )
        readings = (
            ReadingTaken(at_ms, Reading(**dict(zip(form.reading, row, strict=True))))
            for at_ms, *row in zip(*table["r"], strict=True)
        )
        events: list[Event] = []
        for letter in order:
            events.append(next(statuses) if letter == "s" else next(readings))
    except (zlib.error, ValueError, KeyError, TypeError, IndexError, StopIteration) as error:
        raise RecordBroken(f"a stored chunk of readings cannot be read: {error}") from error
    if at != len(columns) or order.strip("sr"):
        raise RecordBroken("a stored chunk of readings holds more than its header says")
    yield from events


def _put_column(out: bytearray, values: Sequence[int]) -> None:
    previous = 0
    for value in values:
        step = value - previous
        previous = value
        zigzag = (step << 1) if step >= 0 else ((-step << 1) - 1)
        while zigzag > 0x7F:
            out.append(0x80 | (zigzag & 0x7F))
            zigzag >>= 7
        out.append(zigzag)


def _take_column(data: bytes, at: int, n: int) -> tuple[list[int], int]:
    values: list[int] = []
    value = 0
    for _ in range(n):
        shift = zigzag = 0
        while True:
            byte = data[at]
            at += 1
            zigzag |= (byte & 0x7F) << shift
            shift += 7
            if byte < 0x80:
                break
        value += (zigzag >> 1) if not zigzag & 1 else -((zigzag + 1) >> 1)
        values.append(value)
    return values, at
