"""Standing by while a coil is wound: shows it, asks for consent, passes stops on.

The run lives in a thread of its own and needs nobody; what happens here can at most ask it to hold. A
signal puts its hold into the run's queue at once, inside the handler. It is never answered by ending the
program: only the run knows when the spindle stands.
"""

from __future__ import annotations

import signal
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from types import FrameType
from typing import TYPE_CHECKING, Protocol

from windctl.cli.progress import LIVE_PERIOD_S, Face
from windctl.cli.prompt import Prompt
from windctl.errors import RunFailed, UsageError, WindctlError

if TYPE_CHECKING:
    from windctl.run.runner import Ended, Request
    from windctl.run.snapshot import Snapshot

LAST_WAIT_S = 30.0  # for a run to end after a fault on this side

_STOPPING_ALREADY = "already stopping; if it does not stop, use the hardware stop"

CAUTIONS = """\
Before anything turns: guard closed, hands off, hair, sleeves and jewellery tucked away, no gloves.
Wear eye protection: fine wire whips when it breaks. Never touch the work while it turns.
Know where the hardware stop is; this program is not a safety function."""


class Watched(Protocol):
    """A run, as far as a person who stands by is concerned."""

    def start(self) -> None: ...
    def request(self, request: Request) -> None: ...
    def look(self) -> Snapshot: ...
    def wait(self, timeout_s: float) -> Ended | None: ...


def stand_by(run: Watched, face: Face, prompt: Prompt | None) -> Ended:
    """Start the run, show it, answer what it asks, until it has ended.

    `prompt` is None where nobody can be asked: the run then ends as soon as it asks for something.
    Raises UsageError in that case on a real machine, RunFailed on a simulated one; the run is over by then.
    """
    from windctl.run.runner import Hold

    stops, questions = _Stops(run), _Questions(run, face, prompt)
    with _listening(stops):
        run.start()
        try:
            while (ended := run.wait(LIVE_PERIOD_S)) is None:
                snapshot = run.look()
                face.show(snapshot)
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
        from windctl.run.runner import Hold

        if self.signal is None:
            self.signal = signal.Signals(number).name
            self._run.request(Hold("operator", f"interrupted by {self.signal}", leave=True))
        self._heard += 1

    def news(self) -> str | None:
        """What to say about signals not told of yet."""
        if self._heard == self._told:
            return None
        words = _STOPPING_ALREADY if self._told else f"{self.signal}: holding"
        self._told = self._heard
        return words


class _Questions:
    """What the run asks, put to the person once each time, and the answers."""

    def __init__(self, run: Watched, face: Face, prompt: Prompt | None) -> None:
        self._run = run
        self._face = face
        self._prompt = prompt
        self._open: str | None = None
        self.unanswerable: WindctlError | None = None

    def consider(self, snapshot: Snapshot) -> None:
        """Ask what is newly asked, and pass an answer on."""
        asks = None if snapshot.asks == "turn" else snapshot.asks  # that one ends the run by itself
        if asks != self._open:
            self._open = asks
            if self._open is not None:
                self._ask(snapshot)
        elif self._open is not None and self._prompt is not None:
            line = self._prompt.answer()
            if line is not None:
                self._answered(line, snapshot)

    def _ask(self, snapshot: Snapshot) -> None:
        from windctl.run.runner import End, Hold

        if self._prompt is None:
            self.unanswerable = _nobody_to_ask(snapshot)
            # A coil without a turn is no coil to go on with later.
            unwound = snapshot.turns <= 0
            why = "nobody to ask"
            self._run.request(End("windctl", why) if unwound else Hold("windctl", why, leave=True))
            return
        if snapshot.asks == "go" and not snapshot.virtual:
            self._face.say(CAUTIONS)
        self._prompt.open_question()
        self._face.say(_question(snapshot))

    def _answered(self, line: str, snapshot: Snapshot) -> None:
        from windctl.run.runner import Clear, End, Go

        if line == snapshot.asks == "go":
            self._run.request(Go("operator"))
        elif line == snapshot.asks == "clear":
            self._run.request(Clear("operator"))
        elif line == "end" and snapshot.turns > 0:
            self._run.request(End("operator", "ended by the operator"))
        elif line:
            self._face.say(_question(snapshot))


def _question(snapshot: Snapshot) -> str:
    if snapshot.asks == "clear":
        return f"{snapshot.says}. Look to the cause, then type clear and Enter; nothing turns by that."
    if snapshot.turns > 0:
        words = "Type go and Enter to go on, or end and Enter to end the coil here; Ctrl-C leaves it open."
        return f"{snapshot.says}. {words}"
    return "Type go and Enter to start; Ctrl-C leaves without turning anything."


def _nobody_to_ask(snapshot: Snapshot) -> WindctlError:
    if snapshot.virtual:
        return RunFailed(f"the run waits for {snapshot.asks!r} ({snapshot.says}) and nobody can be asked")
    return UsageError(
        f"this is a real machine: it turns only after {snapshot.asks!r} was typed at a terminal, "
        "so --no-input and input that is no terminal are refused; nothing was started"
    )


@contextmanager
def _listening(stops: _Stops) -> Iterator[None]:
    """Ctrl-C, SIGTERM and SIGHUP reach `stops` instead of ending the program."""
    if threading.current_thread() is not threading.main_thread():
        yield  # only the main thread can have handlers; whoever runs us elsewhere passes stops on itself
        return
    names = [name for name in ("SIGINT", "SIGTERM", "SIGHUP", "SIGBREAK") if hasattr(signal, name)]
    before = {name: signal.signal(getattr(signal, name), stops.heard) for name in names}
    try:
        yield
    finally:
        for name, handler in before.items():
            signal.signal(getattr(signal, name), handler)
