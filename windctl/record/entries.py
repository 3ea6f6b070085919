"""Events as rows. A rare fact is a row of its own; runs of dense facts become chunks of about half a second.

A chunk is a small JSON header line (what is in it, under which column names) and zlib-packed columns of
zigzag varints: the first value, then differences. Nothing is rounded: unpacking gives the same events. Chunks
end where the board's clock passes a multiple of 500 ticks and before every rare fact, so order is kept and
the cut depends on facts alone, not on how fast the host happened to run.
"""

from __future__ import annotations

import dataclasses
import json
import zlib
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass

from windctl.errors import RecordBroken
from windctl.protocol.messages import Reading, Status
from windctl.record.canonical import decode, dumps, encode
from windctl.record.events import DENSE, Event, ReadingTaken, StatusHeard

CHUNK_TICKS = 500
CHUNK = "chunk"

_STATUS_COLUMNS = tuple(field.name for field in dataclasses.fields(Status))
_READING_COLUMNS = tuple(field.name for field in dataclasses.fields(Reading))


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


def _ticks(event: StatusHeard | ReadingTaken) -> int:
    return event.status.ticks if isinstance(event, StatusHeard) else event.reading.ticks


def _pack(events: Sequence[StatusHeard | ReadingTaken]) -> bytes:
    statuses = [event for event in events if isinstance(event, StatusHeard)]
    readings = [event for event in events if isinstance(event, ReadingTaken)]
    header = dumps(
        {
            "order": "".join("s" if isinstance(event, StatusHeard) else "r" for event in events),
            "status": ["at_ms", *_STATUS_COLUMNS],
            "reading": ["at_ms", *_READING_COLUMNS],
        }
    )
    columns = bytearray()
    _put_column(columns, [event.at_ms for event in statuses])
    for name in _STATUS_COLUMNS:
        _put_column(columns, [getattr(event.status, name) for event in statuses])
    _put_column(columns, [event.at_ms for event in readings])
    for name in _READING_COLUMNS:
        _put_column(columns, [getattr(event.reading, name) for event in readings])
    return zlib.compress(header + b"\n" + bytes(columns), 6)


def _unpack(payload: bytes) -> Iterator[Event]:
    try:
        header, _, columns = zlib.decompress(payload).partition(b"\n")
        about = json.loads(header)
        order: str = about["order"]
        at = 0
        table: dict[str, list[list[int]]] = {}
        for letter, names in (("s", about["status"]), ("r", about["reading"])):
            n = order.count(letter)
            table[letter] = []
            for _name in names:
                column, at = _take_column(columns, at, n)
                table[letter].append(column)
        statuses = iter(
            [
                StatusHeard(row[0], Status(**dict(zip(about["status"][1:], row[1:], strict=True))))
                for row in zip(*table["s"], strict=True)
            ]
        )
        readings = iter(
            [
                ReadingTaken(row[0], Reading(**dict(zip(about["reading"][1:], row[1:], strict=True))))
                for row in zip(*table["r"], strict=True)
            ]
        )
        events: list[Event] = [next(statuses) if letter == "s" else next(readings) for letter in order]
    except (zlib.error, ValueError, KeyError, TypeError, IndexError, StopIteration) as error:
        raise RecordBroken(f"a stored chunk of readings cannot be read: {error}") from error
    if at != len(columns):
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
