"""From the command line into the interface and out again, with nothing left turning."""

from __future__ import annotations

import os
import select
import signal
import sys
import threading
import tomllib
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from types import FrameType
from typing import Any

from windctl.desk import places
from windctl.desk.asked import Shared
from windctl.desk.log import faults_of_threads
from windctl.tui.app import WindctlApp, farewell
from windctl.tui.session import Session

INTERRUPTED = 130
SWITCH_S = 0.001  # how long a busy thread may keep the others waiting: a fifth of the usual, for the hold key
_GRACE_S = 3.0  # for the interface to end by itself once the record is complete


def start(shared: Shared) -> int:
    """Run the interface until it is left; the exit code. Raises WindctlError for an unknown machine."""
    if os.environ.get("NO_COLOR") == "":
        del os.environ["NO_COLOR"]  # set and empty means not set
    sys.setswitchinterval(SWITCH_S)
    session = Session(shared)
    settings = _settings()
    app = WindctlApp(session, _table(settings, "keys"), light=settings.get("theme") == "light")
    stopped = threading.Event()
    with faults_of_threads() as faults, _signals(session, app, stopped):
        try:
            code = app.run()
        finally:
            run = session.run
            outcome = session.leave("the interface ended")  # a screen that failed leaves nothing turning
            words = farewell(run, outcome) or app.farewell
    if faults:
        words = f"{words}\nThe log has the details: {faults[0]}".strip()
    if words:
        with suppress(OSError):  # the terminal may be gone
            sys.stderr.write(f"{words}\n")
            sys.stderr.flush()
    return INTERRUPTED if stopped.is_set() else code or 0


@contextmanager
def _signals(session: Session, app: WindctlApp, stopped: threading.Event) -> Iterator[None]:
    """SIGTERM, SIGHUP, a terminal that is gone: hold at once; the rest follows in a thread, since nothing can
    be shown any more."""

    def leave(reason: str) -> None:
        session.leave(reason)
        # Before the interface is asked to end: it may be stuck for good in writing to what is gone.
        done = threading.Timer(_GRACE_S, _end)
        done.daemon = True
        done.start()
        with suppress(RuntimeError):  # it has ended already
            app.call_from_thread(app.exit, INTERRUPTED)

    def heard(number: int, _frame: FrameType | None) -> None:
        end(f"interrupted by {signal.Signals(number).name}")

    def end(reason: str) -> None:
        session.hold(reason, leave=True)
        if not stopped.is_set():
            stopped.set()
            threading.Thread(target=leave, args=(reason,), name="windctl-leaving", daemon=True).start()

    names = [name for name in ("SIGTERM", "SIGHUP", "SIGBREAK") if hasattr(signal, name)]
    before: dict[str, Callable[..., Any] | int | None] = {
        name: signal.signal(getattr(signal, name), heard) for name in names
    }
    _watch_terminal(lambda: end("the terminal is gone"))
    try:
        yield
    finally:
        for name, handler in before.items():
            signal.signal(getattr(signal, name), handler)


def _watch_terminal(gone: Callable[[], None]) -> None:
    """Only a program that its terminal controls is sent a signal when that closes; any other would stay, with
    nobody to see it."""
    if not hasattr(select, "poll") or not os.isatty(0):  # Windows ends a program with its window
        return
    poll = select.poll()
    poll.register(0, 0)  # no event is asked for: what is left to hear is that it was hung up

    def wait() -> None:
        if any(mask & select.POLLHUP for _, mask in poll.poll()):
            gone()

    threading.Thread(target=wait, name="windctl-terminal", daemon=True).start()


def _end() -> None:
    """The record is complete and the spindle stands, and writing to a terminal that is gone may hang."""
    os._exit(INTERRUPTED)


def _settings() -> dict[str, Any]:
    try:
        return tomllib.loads(places.settings_file().read_text(encoding="utf-8"))
    except (OSError, UnicodeDecodeError, tomllib.TOMLDecodeError):
        return {}  # a file that cannot be read is told of where the machine is looked up in it


def _table(settings: dict[str, Any], name: str) -> dict[str, object]:
    table = settings.get(name)
    return table if isinstance(table, dict) else {}
