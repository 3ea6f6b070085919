"""The interface in a terminal of its own: a process behind a pseudo-terminal, a served machine, a line.

The line is listened to on both ways, and the board's last Status is repeated on it as often as asked.
"""

from __future__ import annotations

import fcntl
import os
import pty
import re
import select
import socket
import sqlite3
import struct
import subprocess
import sys
import termios
import threading
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from pathlib import Path

from tests.cli.processes import served
from tests.cli.recipes import to_turns
from windctl.protocol.frames import Frame, FrameReader, encode
from windctl.protocol.messages import Hold, State, Status, decode

KEYS = {
    "f1": b"\x1bOP",
    "f3": b"\x1bOR",
    "f4": b"\x1bOS",
    "f7": b"\x1b[18~",
    "f8": b"\x1b[19~",
    "f9": b"\x1b[20~",
    "f10": b"\x1b[21~",
    "enter": b"\r",
    "escape": b"\x1b",
}


class Line:
    """A line between one host and one board, with ears."""

    def __init__(self, board: str, status_per_s: float) -> None:
        self._every = 1.0 / status_per_s
        self._listener = socket.create_server(("127.0.0.1", 0))
        self.url = f"socket://127.0.0.1:{self._listener.getsockname()[1]}"
        host, _, port = board.removeprefix("socket://").rpartition(":")
        self._board = (host, int(port))
        self._stop = threading.Event()
        self.holds: list[float] = []
        self.status: Status | None = None
        self.statuses = 0
        self._thread = threading.Thread(target=self._run, daemon=True)
        self._thread.start()

    def close(self) -> None:
        self._stop.set()
        self._listener.close()
        self._thread.join(5)

    def _run(self) -> None:
        with suppress(OSError):
            near, _ = self._listener.accept()
            far = socket.create_connection(self._board)
            with near, far:
                self._carry(near, far)

    def _carry(self, near: socket.socket, far: socket.socket) -> None:
        from_host, from_board = FrameReader(), FrameReader()
        last: Frame | None = None
        due = time.monotonic()
        near.setsockopt(socket.IPPROTO_TCP, socket.TCP_NODELAY, 1)
        far.setsockopt(socket.IPPROTO_TCP, socket.TCP_NODELAY, 1)
        while not self._stop.is_set():
            ready, _, _ = select.select([near, far], [], [], 0.001)
            if near in ready:
                data = near.recv(4096)
                now = time.monotonic()
                if not data:
                    return
                self.holds += [now for frame in from_host.feed(data) if frame.code == Hold.CODE]
                far.sendall(data)
            if far in ready:
                data = far.recv(4096)
                if not data:
                    return
                for frame in from_board.feed(data):
                    near.sendall(encode(frame.code, frame.sequence, frame.body))
                    if frame.code == Status.CODE:
                        last = frame
                        message = decode(frame.code, frame.body)
                        assert isinstance(message, Status)
                        self.status = message
            while last is not None and time.monotonic() >= due:
                due = max(due + self._every, time.monotonic() - 0.1)
                near.sendall(encode(last.code, last.sequence, last.body))
                self.statuses += 1


class Terminal:
    """One process behind a pseudo-terminal, whose output is taken no faster than `bytes_per_s`."""

    def __init__(
        self, arguments: list[str], folder: Path, size: tuple[int, int], bytes_per_s: float | None = None
    ) -> None:
        self._master, slave = pty.openpty()
        fcntl.ioctl(slave, termios.TIOCSWINSZ, struct.pack("HHHH", size[1], size[0], 0, 0))
        environment = {**os.environ, "TERM": "xterm-256color", "COLORTERM": "truecolor"}
        environment["PYTHONPATH"] = str(Path(__file__).resolve().parents[2])
        self.process = subprocess.Popen(
            [sys.executable, "-m", "windctl", *arguments],
            stdin=slave,
            stdout=slave,
            stderr=slave,
            cwd=folder,
            env=environment,
            start_new_session=True,
        )
        os.close(slave)
        self._rate = bytes_per_s
        self._taken_at = time.monotonic()
        self.written = 0
        self.text = ""
        self._stop = threading.Event()
        self._thread = threading.Thread(target=self._drain, daemon=True)
        self._thread.start()

    def press(self, *keys: str) -> None:
        """Keys as a terminal sends them."""
        for key in keys:
            os.write(self._master, KEYS.get(key) or key.encode())
            if key == "escape":
                time.sleep(0.15)  # alone, it is no beginning of a longer key

    def caught_up(self, seconds: float = 15.0) -> None:
        """Wait until everything that was sent stands there, as somebody does who reads before they type; a
        screen that moves is waited for no longer than that."""
        end = time.monotonic() + seconds
        while time.monotonic() < end and time.monotonic() - self._taken_at < 0.3:
            time.sleep(0.02)

    def cpu_s(self) -> float:
        """Processor time of the process so far."""
        fields = Path(f"/proc/{self.process.pid}/stat").read_text().rpartition(")")[2].split()
        return (int(fields[11]) + int(fields[12])) / os.sysconf("SC_CLK_TCK")

    def memory_mb(self) -> float:
        """Resident memory of the process."""
        found = re.search(r"VmRSS:\s+(\d+)", Path(f"/proc/{self.process.pid}/status").read_text())
        assert found is not None
        return int(found[1]) / 1024

    def vanish(self) -> None:
        """The window is closed. No signal tells: the process is of another session than the terminal."""
        if self._master >= 0:
            self._stop.set()
            self._thread.join(5)
            os.close(self._master)
            self._master = -1

    def close(self) -> None:
        """End it by force, if it has not ended."""
        if self.process.poll() is None:
            self.process.kill()
        self.process.wait(10)
        self.vanish()

    def _drain(self) -> None:
        begun, taken = time.monotonic(), 0
        while not self._stop.is_set():
            if self._rate is not None and taken > self._rate * (time.monotonic() - begun):
                time.sleep(0.01)
                continue
            ready, _, _ = select.select([self._master], [], [], 0.1)
            if not ready:
                if self._rate is not None:
                    begun, taken = time.monotonic(), 0
                continue
            try:
                data = os.read(self._master, 65536 if self._rate is None else 256)
            except OSError:
                return
            taken += len(data)
            self._taken_at = time.monotonic()
            self.written += len(data)
            self.text = (self.text + data.decode(errors="replace"))[-20_000:]


def until(what: Callable[[], bool], seconds: float, why: str) -> None:
    """Wait until something holds."""
    end = time.monotonic() + seconds
    while not what():
        assert time.monotonic() < end, why
        time.sleep(0.01)


@contextmanager
def winding(
    folder: Path,
    *,
    size: tuple[int, int] = (80, 24),
    status_per_s: float = 500.0,
    bytes_per_s: float | None = None,
    turns: int = 20_000,
) -> Iterator[tuple[Terminal, Line]]:
    """A long coil that turns on a served machine, seen on a terminal; everything is ended afterwards."""
    recipe = to_turns(folder, turns)
    text = recipe.read_text(encoding="utf-8").replace("flange_depth_mm = 8.5", "flange_depth_mm = 40")
    recipe.write_text(text, encoding="utf-8")
    with served(recipe, speed=1.0) as (url, _):
        line = Line(url, status_per_s)
        arguments = ["--machine", "virtual", "--port", line.url, "--book", str(folder / "a.book")]
        terminal = Terminal(arguments, folder, size, bytes_per_s)
        try:
            until(lambda: "program" in terminal.text, 30, "no plan was shown")
            terminal.press("enter")
            until(lambda: "confirm each line" in terminal.text, 30, "no check list was shown")
            for _ in range(14):
                terminal.press("enter")
                time.sleep(0.05)
            terminal.press("p", "s")  # without the dry pass that a machine behind a port begins with
            until(lambda: turning(line), 60, f"it does not turn: {terminal.text[-3000:]}")
            yield terminal, line
        finally:
            terminal.close()
            line.close()


def turning(line: Line) -> bool:
    """Whether the board says that it turns."""
    return line.status is not None and line.status.state == State.TURNING


def standing(line: Line) -> bool:
    """Whether the board says that it does not."""
    return line.status is not None and line.status.state != State.TURNING


@contextmanager
def journal_blocked(book: Path) -> Iterator[None]:
    """Nobody else can write the book meanwhile."""
    connection = sqlite3.connect(book, isolation_level=None, timeout=30)
    try:
        connection.execute("BEGIN IMMEDIATE")
        yield
        connection.execute("ROLLBACK")
    finally:
        connection.close()
