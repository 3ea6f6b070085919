"""The journal thread: facts become durable here, and a slow disk never delays the serial line.

The runner hands over entries and goes on; this thread commits them in batches. A ticket tells when a certain
entry is durable: consents wait for theirs before they act. A failed commit stops the journal; the runner sees
it, holds, and ends. What was not written is kept and tried once more on closing: a disk that has room again
by then, or a book no longer locked, still gets the facts that say why the coil was held.
"""

from __future__ import annotations

import threading
import time
from collections.abc import Sequence
from typing import Protocol

from windctl.errors import BookError, WindctlError
from windctl.record.entries import Entry

LINGER_S = 0.5  # how long entries of a simulated run may gather before a commit; real ones do not wait
TOO_OLD_S = 3.0  # an uncommitted fact older than this means: hold
MOST_WAITING = 400  # entries, about 200 s of a coil: a simulated run waits beyond that


class CoilLog(Protocol):
    """Where one coil's facts go. Used by one thread, which need not be the one that made it."""

    def commit(self, entries: Sequence[Entry]) -> None:
        """Append entries in order; durable on return.

        Raises BookError when they could not be stored; then none of them was.
        """
        ...

    def close(self) -> None:
        """Give back what is held. Called by the thread that committed."""
        ...


class Journal:
    """A queue of entries and the thread that commits them."""

    def __init__(self, log: CoilLog, linger_s: float = 0.0) -> None:
        self._log = log
        self._linger_s = linger_s
        self._waiting: list[tuple[float, Entry]] = []
        self._unwritten: list[Entry] = []  # the batch whose commit failed
        self._handed = 0
        self._durable = 0
        self._urgent = False
        self._closing = False
        self._failure: WindctlError | None = None
        self._oldest_being_written: float | None = None
        self._changed = threading.Condition()
        self._thread = threading.Thread(target=self._work, name="windctl-journal", daemon=True)
        self._thread.start()

    def put(self, entries: Sequence[Entry], *, urgent: bool) -> int:
        """Hand entries over; the ticket of the last one."""
        with self._changed:
            now = time.monotonic()
            self._waiting.extend((now, entry) for entry in entries)
            self._handed += len(entries)
            self._urgent |= urgent
            if entries:
                self._changed.notify_all()
            return self._handed

    def is_durable(self, ticket: int) -> bool:
        """True once the entry of that ticket is on disk."""
        return self._durable >= ticket

    def wait(self, ticket: int, timeout_s: float) -> bool:
        """Wait until the entry of that ticket is durable; False when it is not, in time or ever."""
        with self._changed:
            self._urgent |= self._durable < ticket
            self._changed.notify_all()
            self._changed.wait_for(lambda: self._durable >= ticket or self._failure is not None, timeout_s)
            return self._durable >= ticket

    @property
    def waiting(self) -> int:
        """Entries handed over and not yet durable."""
        return self._handed - self._durable

    @property
    def failure(self) -> WindctlError | None:
        """Why the journal stopped, if it did."""
        return self._failure

    def paused(self, seconds: float) -> None:
        """This process did not run for so long: that time makes no fact older."""
        with self._changed:
            self._waiting = [(at + seconds, entry) for at, entry in self._waiting]
            if self._oldest_being_written is not None:
                self._oldest_being_written += seconds

    def oldest_s(self) -> float:
        """Age in seconds of the oldest fact not yet durable."""
        with self._changed:
            first = self._oldest_being_written
            if first is None and self._waiting:
                first = self._waiting[0][0]
            return 0.0 if first is None else time.monotonic() - first

    def close(self, timeout_s: float = 30.0) -> None:
        """Commit what is left, also what failed before, and end the thread.

        Raises BookError when something could not be made durable.
        """
        with self._changed:
            self._closing = True
            self._changed.notify_all()
        self._thread.join(timeout_s)
        if self._durable == self._handed:
            return
        if self._failure is not None:
            raise self._failure
        if self._thread.is_alive():
            raise BookError(
                f"the coil book did not take the last {self.waiting} facts within {timeout_s:.0f} s"
            )

    def _work(self) -> None:
        try:
            self._commit_until_closed()
        except WindctlError as error:
            self._fail(error)
        except BaseException as error:  # noqa: BLE001 - whatever it is, the record is not safe: the machine stops
            self._fail(BookError(f"the journal failed: {type(error).__name__}: {error}"))
        try:
            if self._failure is not None:
                self._try_once_more()
        finally:
            self._log.close()

    def _commit_until_closed(self) -> None:
        while batch := self._next_batch():
            self._unwritten = batch
            self._commit_unwritten()

    def _try_once_more(self) -> None:
        with self._changed:
            self._changed.wait_for(lambda: self._closing)
        try:
            self._commit_unwritten()  # as it was tried before: it may have reached the disk after all
            self._commit_until_closed()
        except WindctlError:
            return  # `close` raises the first failure
        except Exception:  # noqa: BLE001 - the failure that stopped the journal is the one to tell
            return

    def _commit_unwritten(self) -> None:
        if self._unwritten:
            self._log.commit(self._unwritten)
        with self._changed:
            self._durable += len(self._unwritten)
            self._unwritten = []
            self._oldest_being_written = None
            self._changed.notify_all()

    def _next_batch(self) -> list[Entry]:
        """Wait for something to commit; empty when closing and all is done."""
        with self._changed:
            self._changed.wait_for(lambda: self._waiting or self._closing)
            if self._waiting and not self._urgent and not self._closing:
                left = self._waiting[0][0] + self._linger_s - time.monotonic()
                self._changed.wait_for(lambda: self._urgent or self._closing, max(0.0, left))
            batch = [entry for _, entry in self._waiting]
            self._oldest_being_written = self._waiting[0][0] if self._waiting else None
            self._waiting = []
            self._urgent = False
            return batch

    def _fail(self, error: WindctlError) -> None:
        with self._changed:
            self._failure = error
            self._changed.notify_all()
