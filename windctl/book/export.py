"""One coil as plain data: JSON for people's scripts, and lossless for other books.

An export stands by itself: every digest in it can be computed anew with SHA-256 alone, and `restored` does.
"""

from __future__ import annotations

import base64
import json
from collections.abc import Mapping, Sequence
from dataclasses import asdict, dataclass, fields
from typing import Any

from windctl.book.check import check_record
from windctl.book.heads import SEAL, CoilHead
from windctl.book.imports import recorded_head
from windctl.book.logs import COIL, Log, LogRow, check_log, facts_of, read
from windctl.book.queries import StoredRow, curve_in, stored_rows
from windctl.book.store import Store
from windctl.errors import RecordBroken
from windctl.record.addenda import plain
from windctl.record.canonical import encode
from windctl.record.chain import genesis
from windctl.record.curve import CurvePoint
from windctl.record.entries import Entry, unpack
from windctl.record.events import CoilStarted, Event

FORMAT = 1

# The row's columns that the export names otherwise.
_RENAMED = ("number", "target_kind", "target_value")
# Columns that older exports lack: the first fact has them.
_LATER = ("spool",)


@dataclass(frozen=True, slots=True)
class Restored:
    """What an export holds: the coil's row, every row of its record, its curve, and what was said since."""

    head: CoilHead
    rows: tuple[StoredRow, ...]
    curve: tuple[CurvePoint, ...]
    log: Log | None


def summary_of(head: CoilHead) -> dict[str, object]:
    """A coil's row as plain data."""
    plain = {field.name: getattr(head, field.name) for field in fields(head) if field.name not in _RENAMED}
    target = {"kind": head.target_kind, "value": head.target_value}
    return {"format": FORMAT, "coil": head.number, **plain, "target": target, "sealed": head.sealed}


def event_data(event: Event) -> dict[str, object]:
    """One event as plain data: its kind and its fields."""
    return {"kind": event.kind, **json.loads(encode(event))}


def shown(store: Store, head: CoilHead) -> dict[str, object]:
    """A coil's row, events and curve as plain data.

    Raises RecordBroken when a row of the record cannot be read.
    """
    rows = tuple(stored_rows(store, head.id, head.n_entries))
    return _shown(store, head, rows)


def exported(store: Store, head: CoilHead, *, told: bool = True) -> dict[str, object]:
    """`shown`, and the rows of the record as they are stored; not `told`: without events and addenda, which
    repeat the rows in a form to be read.

    Each row: `seq`, `kind`, `events` (how many it holds), `payload` (base64), `link` (hex): SHA-256 over the
    link before, the length of the kind (u16, big endian), the kind, the payload.

    Raises RecordBroken when a row of the record cannot be read.
    """
    rows = tuple(stored_rows(store, head.id, head.n_entries))
    plain = [
        {
            "seq": row.seq,
            "kind": row.entry.kind,
            "events": row.entry.events,
            "payload": base64.b64encode(row.entry.payload).decode(),
            "link": row.link.hex(),
        }
        for row in rows
    ]
    head = _as_recorded(head, rows)
    if told:
        shape = _shown(store, head, rows)
    else:
        shape = {**summary_of(head), "curve": [asdict(point) for point in _curve(store, head)]}
    log = _log(store, head)
    return {**shape, "genesis": genesis(head.id).hex(), "entries": plain, "log": _exported_log(log)}


def _as_recorded(head: CoilHead, rows: Sequence[StoredRow]) -> CoilHead:
    """An imported coil goes out under the number that its record has."""
    started = next(unpack(row.entry for row in rows), None)
    return recorded_head(head, started.number) if isinstance(started, CoilStarted) else head


def _exported_log(log: Log | None) -> dict[str, object] | None:
    """A log's rows as they are stored, tied like those of the record; the first to SHA-256 of its name behind
    "windctl log 1" and a zero."""
    if log is None:
        return None
    rows = [
        {
            "seq": row.seq,
            "kind": row.kind,
            "payload": base64.b64encode(row.payload).decode(),
            "link": row.link.hex(),
        }
        for row in log.rows
    ]
    return {"name": log.name, "n": log.n, "digest": log.digest, "entries": rows}


def restored(data: Mapping[str, Any]) -> Restored:
    """What was exported, when every digest in it agrees.

    Raises RecordBroken where one does not, or something is missing.
    """
    try:
        if data["format"] != FORMAT:
            raise RecordBroken(
                f"this export has format {data['format']!r}; this windctl reads format {FORMAT}"
            )
        target = data["target"]
        named = {"number": data["coil"], "target_kind": target["kind"], "target_value": target["value"]}
        names = [field.name for field in fields(CoilHead) if field.name not in (*_RENAMED, *_LATER)]
        plain = {name: data[name] for name in names}
        rows = tuple(
            StoredRow(
                row["seq"],
                Entry(row["kind"], base64.b64decode(row["payload"], validate=True), row["events"]),
                bytes.fromhex(row["link"]),
            )
            for row in data["entries"]
        )
        later = {name: data.get(name, _of_start(rows, name)) for name in _LATER}
        head = CoilHead(**_floats(CoilHead, {**named, **plain, **later}))
        curve = tuple(CurvePoint(**_floats(CurvePoint, point)) for point in data["curve"])
        log = None if data["log"] is None else _restored_log(data["log"])
    except (KeyError, TypeError, ValueError) as error:
        raise RecordBroken(f"this export is not whole: {type(error).__name__} {error}") from error
    faults = check_record(head, rows, list(enumerate(curve)))
    if faults:
        raise RecordBroken(f"the export of coil {head.number} was altered: {faults[0].what}")
    if log is not None and log.name != COIL + head.id:
        raise RecordBroken(f"the export of coil {head.number} was altered: its log is {log.name!r}")
    for fault in () if log is None else check_log(log):
        where = f"row {fault.seq} of what was said since"
        raise RecordBroken(f"the export of coil {head.number} was altered: {where}: {fault.what}")
    return Restored(head, rows, curve, log)


def _of_start(rows: Sequence[StoredRow], name: str) -> object:
    """What the first fact says. Raises RecordBroken when it cannot be read."""
    return getattr(next(unpack(row.entry for row in rows), None), name, "")


def _restored_log(data: Mapping[str, Any]) -> Log:
    rows = tuple(
        LogRow(
            row["seq"],
            row["kind"],
            base64.b64decode(row["payload"], validate=True),
            bytes.fromhex(row["link"]),
        )
        for row in data["entries"]
    )
    return Log(data["name"], data["n"], data["digest"], rows)


def _floats(kind: type[CoilHead | CurvePoint], values: Mapping[str, Any]) -> dict[str, Any]:
    """The values, with floats where they belong: JSON has one kind of number, 30.0 may come back as 30."""
    reals = {field.name for field in fields(kind) if str(field.type).startswith("float")}
    return {
        name: float(value) if name in reals and isinstance(value, int) else value
        for name, value in values.items()
    }


def _curve(store: Store, head: CoilHead) -> list[CurvePoint]:
    with store.reading() as connection:
        return [point for _, point in curve_in(connection, head.id)]


def _log(store: Store, head: CoilHead) -> Log | None:
    with store.reading() as connection:
        return read(connection, COIL + head.id)


def _shown(store: Store, head: CoilHead, rows: Sequence[StoredRow]) -> dict[str, object]:
    events = unpack(row.entry for row in rows if row.entry.kind != SEAL)
    return {
        **summary_of(head),
        "events": [event_data(event) for event in events],
        "curve": [asdict(point) for point in _curve(store, head)],
        "addenda": [{"kind": fact.kind, **plain(fact)} for fact in facts_of(_log(store, head))],
    }
