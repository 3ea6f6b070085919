"""One coil being written: what `commit` returned from is on the disk and tied to everything before it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from types import TracebackType
from typing import Any

import sqlalchemy as sa

from windctl.book import tables
from windctl.book.heads import SEAL, CoilHead, closed, curve_rows, head_columns, plain_curve, seal_payload
from windctl.book.lease import Lease
from windctl.book.lessons import keep_row
from windctl.book.store import Store
from windctl.book.words import more_words, written_in
from windctl.errors import BookError
from windctl.record.chain import link
from windctl.record.curve import CurvePoint
from windctl.record.entries import Entry
from windctl.record.events import CoilStarted
from windctl.record.summary import CoilSummary


@dataclass(frozen=True, slots=True)
class _Tail:
    """Where the record ends: how many rows, and the last link."""

    n: int
    link: bytes


class CoilWriter:
    """Appends to one coil's record. The right to write is its own until `close`, `seal` or the process's end.

    Used by one thread at a time, which need not be the one that made it. `started` is the coil's first fact,
    as recorded.
    """

    def __init__(self, store: Store, lease: Lease, head: CoilHead, started: CoilStarted) -> None:
        self._store = store
        self._lease = lease
        self._head = head
        self._tail = _Tail(head.n_entries, bytes.fromhex(head.record_digest))
        self._open = True
        self.started = started

    @property
    def number(self) -> str:
        """The coil's number, e.g. b1-2026-0147."""
        return self._head.number

    @property
    def id(self) -> str:
        """The coil's unique id."""
        return self._head.id

    def commit(self, entries: Sequence[Entry]) -> None:
        """Append `entries` in one transaction; on the disk when this returns.

        Raises BookError; then none of them was appended, and the same may be committed again.
        """
        if not self._open:
            raise BookError(f"coil {self.number} is no longer being written here: reopen it to go on")
        self._refuse_second_start(entries)
        if not entries:
            return
        tail, rows = self._tied(entries)
        with self._store.atomic() as connection:
            self._append(connection, tail, rows)
        self._tail = tail

    def seal(
        self,
        summary: CoilSummary,
        curve: Sequence[CurvePoint],
        trace_digest: str,
        ended: str,
        entries: Sequence[Entry] = (),
    ) -> CoilHead:
        """Append the last `entries`, close the record for ever, end this writer; the coil's row as it now is.

        `ended` is the wall time as text. One transaction: all of it is on the disk when this returns, or
        nothing. A writer that was closed may still seal, unless somebody else writes the coil by then.

        Raises BookError.
        """
        self._refuse_second_start(entries)
        points = plain_curve(self.number, curve)
        head = closed(self._head, summary, trace_digest, ended)
        tail, rows = self._tied([*entries, Entry(SEAL, seal_payload(head, points), 0)])
        head = replace(head, n_entries=tail.n, record_digest=tail.link.hex())
        self._lease.take()
        try:
            with self._store.atomic() as connection:
                if self._append(connection, tail, rows):
                    self._close_record(connection, head, points)
        except BaseException:
            if not self._open:
                self._lease.release()
            raise
        self._tail, self._head = tail, head
        self.close()
        return head

    def close(self) -> None:
        """Give up the right to write. The coil stays open and can be reopened; a second call does nothing."""
        self._open = False
        self._lease.release()

    def __enter__(self) -> CoilWriter:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    def _append(self, connection: sa.Connection, tail: _Tail, rows: list[dict[str, Any]]) -> bool:
        """Append rows that lead to `tail`; False when they are there already.

        A commit may reach the disk although it is reported as failed; then the same is committed again.
        """
        coils = tables.coils
        moved = connection.execute(
            sa.update(coils)
            .where(
                coils.c.id == self.id,
                coils.c.n_entries == self._tail.n,
                coils.c.record_digest == self._tail.link.hex(),
                coils.c.trace_digest.is_(None),
            )
            .values(n_entries=tail.n, record_digest=tail.link.hex())
        )
        if moved.rowcount == 1:
            connection.execute(sa.insert(tables.entries), rows)
            written = written_in(Entry(row["kind"], row["payload"], row["events"]) for row in rows)
            if written:
                longer = coils.c.words + more_words(written)
                connection.execute(sa.update(coils).where(coils.c.id == self.id).values(words=longer))
            return True
        stored = connection.scalar(sa.select(coils.c.record_digest).where(coils.c.id == self.id))
        if stored == tail.link.hex():
            return False
        raise BookError(
            f"coil {self.number} was changed by something else while it was being written: "
            "stop winding and check the book with 'windctl coils verify'"
        )

    def _close_record(self, connection: sa.Connection, head: CoilHead, points: Sequence[CurvePoint]) -> None:
        coils = tables.coils
        connection.execute(sa.update(coils).where(coils.c.id == self.id).values(**head_columns(head)))
        if points:
            connection.execute(sa.insert(tables.curve), curve_rows(self.id, points))
        keep_row(connection, self.id)

    def _tied(self, rows: Sequence[Entry]) -> tuple[_Tail, list[dict[str, Any]]]:
        """Where the record ends with these rows, and the rows as they are stored."""
        n, last = self._tail.n, self._tail.link
        values: list[dict[str, Any]] = []
        for row in rows:
            last = link(last, row.kind, row.payload)
            values.append(
                {
                    "coil": self.id,
                    "seq": n,
                    "kind": row.kind,
                    "events": row.events,
                    "payload": row.payload,
                    "link": last,
                }
            )
            n += 1
        return _Tail(n, last), values

    def _refuse_second_start(self, rows: Sequence[Entry]) -> None:
        if any(row.kind in (CoilStarted.kind, SEAL) for row in rows):
            raise BookError(
                f"coil {self.number} has its beginning in the book already, and an end only by sealing"
            )
