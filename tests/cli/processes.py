"""windctl in processes of its own, for tests about signals, terminals and served boards."""

from __future__ import annotations

import json
import os
import select
import subprocess
import sys
import threading
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

import pytest

from windctl.machine.virtual.bench import Bench, virtual_bench
from windctl.machine.virtual.endpoints import TcpEndpoint
from windctl.machine.virtual.serve import Server
from windctl.profile.builtin import VIRTUAL
from windctl.protocol.messages import Capability
from windctl.recipe.load import load_recipe

WINDCTL = [sys.executable, "-m", "windctl"]


def call(*arguments: str, timeout: float = 60.0) -> subprocess.CompletedProcess[str]:
    """Run windctl to its end, with nothing on standard input."""
    return subprocess.run(
        [*WINDCTL, *arguments],
        stdin=subprocess.DEVNULL,
        capture_output=True,
        text=True,
        timeout=timeout,
        check=False,
    )


def answer(done: subprocess.CompletedProcess[str]) -> Any:
    """The JSON that it printed."""
    return json.loads(done.stdout)


@contextmanager
def begun(*arguments: str) -> Iterator[subprocess.Popen[str]]:
    """windctl while it runs; ended by force if the test leaves it running."""
    process = subprocess.Popen(
        [*WINDCTL, *arguments],
        stdin=subprocess.DEVNULL,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )
    with process:
        try:
            yield process
        finally:
            if process.poll() is None:
                process.kill()


@contextmanager
def served(recipe: Path, *, real: bool = False, speed: float = 2.0) -> Iterator[tuple[str, Bench]]:
    """A virtual machine behind a TCP port: its URL and itself; `real` if its board does not own up to it.

    The host beats twice a second of this computer, and a board holds after two of its own without a beat.
    """
    bench = virtual_bench(load_recipe(recipe), VIRTUAL, seed=3)
    if real:
        bench.board.capabilities &= ~int(Capability.VIRTUAL)
    endpoint = TcpEndpoint("127.0.0.1", 0)
    server = Server(bench, endpoint, speed=speed)
    thread = threading.Thread(target=server.run)
    thread.start()
    try:
        yield endpoint.url, bench
    finally:
        server.stop()
        thread.join(10)
        endpoint.close()


def until(what: Callable[[], bool], seconds: float = 20.0) -> None:
    """Wait for something to become true."""
    end = time.monotonic() + seconds
    while not what():
        assert time.monotonic() < end, "it did not happen in time"
        time.sleep(0.01)


@dataclass
class Session:
    """windctl at a terminal of its own: what a person would see and type there."""

    process: subprocess.Popen[str]
    terminal: int
    seen: str = field(default="")

    def types(self, text: str) -> None:
        """Type it."""
        os.write(self.terminal, text.encode())

    def shows(self, text: str, seconds: float = 20.0) -> None:
        """Wait until it has been on the screen."""
        end = time.monotonic() + seconds
        while text not in self.seen:
            assert time.monotonic() < end, f"{text!r} was not shown: {self.seen}"
            self.look()

    def ends(self, code: int, seconds: float = 30.0) -> str:
        """Wait for its end with this exit code; what it wrote to standard output, which is no terminal."""
        end = time.monotonic() + seconds
        while self.process.poll() is None:
            assert time.monotonic() < end, self.seen
            self.look()
        assert self.process.returncode == code, self.seen
        assert self.process.stdout is not None
        return self.process.stdout.read()

    def look(self) -> None:
        """Take in what is on the screen by now."""
        if not select.select([self.terminal], [], [], 0.05)[0]:
            return
        with suppress(OSError):  # EIO: the program has closed its side
            self.seen += os.read(self.terminal, 65_536).decode(errors="replace")


@contextmanager
def at_terminal(*arguments: str) -> Iterator[Session]:
    """windctl with a terminal for its questions and its display."""
    pty = pytest.importorskip("pty", reason="platform: pseudo-terminals are of POSIX")
    terminal, child = pty.openpty()
    process = subprocess.Popen(
        [*WINDCTL, *arguments], stdin=child, stderr=child, stdout=subprocess.PIPE, text=True
    )
    os.close(child)
    with process:
        try:
            yield Session(process, terminal)
        finally:
            if process.poll() is None:
                process.kill()
            os.close(terminal)
