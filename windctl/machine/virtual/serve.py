"""The virtual machine as a process of its own, at the pace of the wall clock, for hosts that speak serial."""

from __future__ import annotations

import signal
import sys
import threading
import time
from collections.abc import Callable, Iterator
from contextlib import ExitStack, contextmanager
from pathlib import Path
from types import FrameType
from typing import TextIO

from windctl.errors import UsageError
from windctl.machine.plant.faults import Faults
from windctl.machine.virtual.bench import Bench, virtual_bench
from windctl.machine.virtual.endpoints import Endpoint, PtyEndpoint, TcpEndpoint
from windctl.machine.virtual.trace import Trace
from windctl.profile.model import MachineProfile
from windctl.recipe.model import Recipe

_WAIT_S = 0.001
_MOST_TICKS = 200  # at a time, so that the line is never left alone for long
_FORGIVEN_S = 0.5  # further behind than this, the machine takes the time as lost


class Server:
    """Runs `bench` against the clock, and carries bytes between it and the clients that `endpoint` has."""

    def __init__(
        self,
        bench: Bench,
        endpoint: Endpoint,
        *,
        speed: float = 1.0,
        resets_on_open: bool = False,
        trace: Trace | None = None,
        clock: Callable[[], float] = time.monotonic,
    ) -> None:
        if not speed > 0.0:
            raise UsageError(f"a served machine runs at a speed above 0, not {speed:g}: its host has a clock")
        self._bench = bench
        self._endpoint = endpoint
        self._speed = speed
        self._resets_on_open = resets_on_open
        self._trace = trace
        self._clock = clock
        self._stop = threading.Event()
        self._reboot = threading.Event()
        self._was_open = False

    def stop(self) -> None:
        """Ends `run` soon; may be called from a signal handler or another thread."""
        self._stop.set()

    def reboot(self) -> None:
        """Resets the board soon; may be called from a signal handler or another thread."""
        self._reboot.set()

    def run(self) -> None:
        """Serves until `stop`."""
        for _ in self.steps():
            pass

    def steps(self) -> Iterator[None]:
        """What `run` does, one round of waiting, reading, ticking and writing at a time."""
        bench, endpoint = self._bench, self._endpoint
        begun, first = self._clock(), bench.ticks
        while not self._stop.is_set():
            endpoint.wait(_WAIT_S)
            bench.send(endpoint.read())
            self._watch_client()
            if self._reboot.is_set():
                self._reboot.clear()
                self._reset_board()
            late = self._clock() - begun - (bench.ticks - first) / (1000.0 * self._speed)
            bench.advance(min(int(late * 1000.0 * self._speed + 1e-6), _MOST_TICKS))
            if late > _FORGIVEN_S:
                begun, first = self._clock(), bench.ticks
            endpoint.write(bench.take())
            yield

    def _watch_client(self) -> None:
        is_open = self._endpoint.open
        if is_open == self._was_open:
            return
        self._was_open = is_open
        self._note("opened" if is_open else "closed")
        if is_open and self._resets_on_open:
            self._reset_board()

    def _reset_board(self) -> None:
        self._bench.reboot()
        self._note("rebooted")

    def _note(self, what: str) -> None:
        if self._trace is not None:
            self._trace.note(what)


def serve(
    recipe: Recipe,
    profile: MachineProfile,
    *,
    seed: int = 1,
    speed: float = 1.0,
    host: str = "127.0.0.1",
    port: int = 0,
    pty: bool = False,
    trace: Path | None = None,
    resets_on_open: bool | None = None,
    faults: Faults | None = None,
    out: TextIO | None = None,
) -> None:
    """Serves the virtual machine of `profile` with the wire and bobbin of `recipe`, until SIGTERM or Ctrl-C.

    Its first line on `out` (standard output) is the URL to open with pyserial. SIGUSR1 resets the board.
    `resets_on_open` as the profile has it, unless given. `trace`: a file of JSON lines, see `trace.py`.
    Raises MachineError when the port is taken or there are no pseudo-terminals.
    """
    bench = virtual_bench(recipe, profile, seed, faults=faults)
    with ExitStack() as stack:
        endpoint: Endpoint = PtyEndpoint() if pty else TcpEndpoint(host, port)
        stack.callback(endpoint.close)
        instrument = None
        if trace is not None:
            instrument = Trace(bench, stack.enter_context(trace.open("w", encoding="utf-8")))
            bench.watch = instrument.see
        server = Server(
            bench,
            endpoint,
            speed=speed,
            resets_on_open=profile.port.resets_on_open if resets_on_open is None else resets_on_open,
            trace=instrument,
        )
        stack.enter_context(_signals(server))
        print(endpoint.url, file=out or sys.stdout, flush=True)
        server.run()


@contextmanager
def _signals(server: Server) -> Iterator[None]:
    """SIGTERM and SIGINT end the server, SIGUSR1 resets its board; only the main thread may say so."""
    if threading.current_thread() is not threading.main_thread():
        yield
        return

    def end(_number: int, _frame: FrameType | None) -> None:
        server.stop()

    def reset(_number: int, _frame: FrameType | None) -> None:
        server.reboot()

    handlers = {signal.SIGTERM: end, signal.SIGINT: end}
    if hasattr(signal, "SIGUSR1"):
        handlers[signal.SIGUSR1] = reset
    before = {number: signal.signal(number, handler) for number, handler in handlers.items()}
    try:
        yield
    finally:
        for number, handler in before.items():
            signal.signal(number, handler)
