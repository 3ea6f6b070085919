"""Standing by while a coil is wound: shows it, asks for consent, passes stops on.

The run lives in a thread of its own and needs nobody; what happens here can at most ask it to hold. A
signal puts its hold into the run's queue at once, inside the handler. It is never answered by ending the
program: only the run knows when the spindle stands.
"""

from __future__ import annotations

import signal
import threading
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from types import FrameType
from typing import TYPE_CHECKING, Protocol

from windctl.cli.progress import LIVE_PERIOD_S, Face
from windctl.cli.prompt import Prompt
from windctl.cli.questions import Hand, Questions
from windctl.run.requests import Hold, Request

if TYPE_CHECKING:
    from windctl.desk.simulated_leads import SimulatedLeads
    from windctl.run.runner import Ended
    from windctl.run.snapshot import Snapshot

LAST_WAIT_S = 30.0  # for a run to end after a fault on this side

_STOPPING_ALREADY = "already stopping; if it does not stop, use the hardware stop"


class Watched(Protocol):
    """A run, as far as a person who stands by is concerned."""

    def start(self) -> None: ...
    def request(self, request: Request) -> None: ...
    def look(self) -> Snapshot: ...
    def wait(self, timeout_s: float) -> Ended | None: ...


def stand_by(
    run: Watched,
    face: Face,
    prompt: Prompt | None,
    hand: Hand | None = None,
    leads: SimulatedLeads | None = None,
) -> Ended:
    """Start the run, show it, answer what it asks, until it has ended.

    `prompt` is None where nobody can be asked: the run then ends as soon as it asks for something. Raises
    UsageError in that case on a real machine, RunFailed on a simulated one; the run is over by then. A trip
    of a simulated machine ends the coil instead.
    """
    stops, questions = _Stops(run), Questions(run, face, prompt, hand, leads)
    with listening(stops.heard):
        run.start()
        questions.begin()
        alarm = ""
        try:
            while (ended := run.wait(LIVE_PERIOD_S)) is None:
                snapshot = run.look()
                face.show(snapshot)
                if snapshot.alarm != alarm:
                    alarm = snapshot.alarm
                    if alarm:
                        face.say(f"alarm: {alarm}")
                news = stops.news()
                if news is not None:
                    face.say(news)
                elif stops.signal is None:
                    questions.consider(snapshot)
            news = stops.news()  # a spindle that hardly turned may stand before anybody was told
            if news is not None:
                face.say(news)
            face.show(run.look())
        except BaseException:
            # Whatever went wrong on this side, the machine comes first.
            run.request(Hold("windctl", "a fault in the command", leave=True))
            run.wait(LAST_WAIT_S)
            raise
        finally:
            face.close()
    if questions.unanswerable is not None:
        raise questions.unanswerable
    return ended


class _Stops:
    """Signals that ask for a stop, turned into one hold."""

    def __init__(self, run: Watched) -> None:
        self._run = run
        self._heard = 0
        self._told = 0
        self.signal: str | None = None

    def heard(self, number: int, _frame: FrameType | None) -> None:
        """The handler: puts the hold, nothing else. A later signal is only counted."""
        if self.signal is None:
            self.signal = signal.Signals(number).name
            self._run.request(Hold("operator", f"interrupted by {self.signal}", leave=True))
        self._heard += 1

    def _named(self) -> str:
        return "Ctrl-C" if self.signal == "SIGINT" else str(self.signal)

    def news(self) -> str | None:
        """What to say about signals not told of yet."""
        if self._heard == self._told:
            return None
        words = _STOPPING_ALREADY if self._told else f"{self._named()}: holding"
        self._told = self._heard
        return words


@contextmanager
def deaf() -> Iterator[None]:
    """Ctrl-C, SIGTERM and SIGHUP are passed over: the spindle stands, and the record is being completed."""
    with listening(lambda _number, _frame: None):
        yield


@contextmanager
def listening(heard: Callable[[int, FrameType | None], None]) -> Iterator[None]:
    """Ctrl-C, SIGTERM and SIGHUP reach `heard` instead of ending the program."""
    if threading.current_thread() is not threading.main_thread():
        yield  # only the main thread can have handlers; whoever runs us elsewhere passes stops on itself
        return
    names = [name for name in ("SIGINT", "SIGTERM", "SIGHUP", "SIGBREAK") if hasattr(signal, name)]
    before = {name: signal.signal(getattr(signal, name), heard) for name in names}
    try:
        yield
    finally:
        for name, handler in before.items():
            signal.signal(getattr(signal, name), handler)
