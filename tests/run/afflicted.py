"""windctl in a process of its own with something wrong: `python -m tests.run.afflicted WHAT[=VALUE] ...`.

What strikes in mid-coil waits for SIGUSR1, so that a test says when.

    disk_full=BOOK     the disk takes no more of the book than it holds now
    journal_dies       the next commit fails in a way that nobody foresaw
    disk_stalls        the next commit takes 5 s
    clock_back         the wall clock goes back by an hour each time it is read
    as_anybody         file permissions bind, also where the tests run as root
    ports=FILE         this computer's serial ports are those of a JSON file
    terminal=NAME      sits at that terminal, so that closing it is felt
"""

from __future__ import annotations

import ctypes
import datetime
import json
import os
import signal
import sys
import time
from collections.abc import Callable, Sequence
from pathlib import Path
from types import FrameType, SimpleNamespace
from typing import Any

STALL_S = 5.0
_PR_CAPBSET_DROP = 24
_CAP_DAC_OVERRIDE = 1


def _at_signal(strike: Callable[[], None]) -> None:
    def heard(_number: int, _frame: FrameType | None) -> None:
        strike()

    signal.signal(signal.SIGUSR1, heard)


def disk_full(book: str) -> None:
    import resource  # not on every platform

    def strike() -> None:
        size = Path(book).stat().st_size
        resource.setrlimit(resource.RLIMIT_FSIZE, (size, resource.getrlimit(resource.RLIMIT_FSIZE)[1]))

    _at_signal(strike)


def _at_next_commit(does: Callable[[], None], *, ever_after: bool) -> None:
    from windctl.book.writer import CoilWriter
    from windctl.record.entries import Entry

    armed: list[bool] = []
    commit = CoilWriter.commit

    def afflicted(self: CoilWriter, entries: Sequence[Entry]) -> None:
        if armed:
            if not ever_after:
                armed.clear()
            does()
        commit(self, entries)

    CoilWriter.commit = afflicted  # type: ignore[method-assign]  # that is the affliction
    _at_signal(lambda: armed.append(True))


def journal_dies(_value: str) -> None:
    def die() -> None:
        raise RuntimeError("torn to pieces")

    _at_next_commit(die, ever_after=True)


def disk_stalls(_value: str) -> None:
    _at_next_commit(lambda: time.sleep(STALL_S), ever_after=False)


def clock_back(_value: str) -> None:
    reads = 0
    right = time.time

    def wrong() -> float:
        nonlocal reads
        reads += 1
        return right() - 3600.0 * reads

    class Clock(datetime.datetime):
        @classmethod
        def now(cls, tz: datetime.tzinfo | None = None) -> Clock:
            return cls.fromtimestamp(wrong(), tz)

    time.time = wrong
    datetime.datetime = Clock  # type: ignore[misc]  # every module that imports it from now on


def as_anybody(_value: str) -> None:
    """Without the right to pass over permissions: it is left at the next exec."""
    if os.geteuid() != 0 or os.environ.get("AFFLICTED"):
        return
    if ctypes.CDLL(None).prctl(_PR_CAPBSET_DROP, _CAP_DAC_OVERRIDE, 0, 0, 0) != 0:
        raise OSError("this system does not let go of the right to pass over permissions")
    environment = {**os.environ, "AFFLICTED": "1"}
    os.execve(sys.executable, [sys.executable, "-m", "tests.run.afflicted", *sys.argv[1:]], environment)


def ports(file: str) -> None:
    from serial.tools import list_ports

    def comports(*_: Any, **__: Any) -> list[SimpleNamespace]:
        return [SimpleNamespace(**entry) for entry in json.loads(Path(file).read_text(encoding="utf-8"))]

    list_ports.comports = comports


def terminal(name: str) -> None:
    """Whoever leads a session and opens a terminal sits at it; windctl then begins anew, there."""
    handle = os.open(name, os.O_RDWR)
    os.dup2(handle, 0)
    os.dup2(handle, 2)
    os.execv(sys.executable, [sys.executable, "-m", "windctl", *sys.argv[2:]])


AFFLICTIONS = {
    each.__name__: each
    for each in (disk_full, journal_dies, disk_stalls, clock_back, as_anybody, ports, terminal)
}


if __name__ == "__main__":
    what, _, value = sys.argv[1].partition("=")
    AFFLICTIONS[what](value)
    from windctl.cli.main import main

    sys.argv = ["windctl", *sys.argv[2:]]
    main()
