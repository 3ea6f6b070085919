"""The serial line to a real board, and to anything else that pyserial can open by a URL.

Every way in which a line can fail leaves as `LinkLost`, and a line that failed once stays lost: nothing is
reopened here, because opening may reset the board. pyserial is loaded on the first opening, not before.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import Protocol

from windctl.errors import LinkLost, MachineError
from windctl.machine.line_trace import FROM_BOARD, TO_BOARD, LineTrace
from windctl.machine.port_lock import PortLock

# What one read takes at most, so that a babbling line cannot keep the runner from its work.
READ_LIMIT = 4096

# A write that cannot be handed over for so long is a dead line: the longest burst takes 20 ms at 115200 baud.
WRITE_TIMEOUT_S = 1.0


class Line(Protocol):
    """What is used of pyserial's ports."""

    timeout: float | None

    @property
    def in_waiting(self) -> int: ...

    def read(self, size: int = 1, /) -> bytes: ...

    def write(self, data: bytes, /) -> int | None: ...

    def close(self) -> None: ...


class SerialPort:
    """A `windctl.machine.ports.Port` on a serial line.

    `url` is a device ("/dev/ttyUSB0", "COM3") or any pyserial URL ("socket://host:port"), `baud` its rate.
    `trace`, where given, gets the last bytes each way. Raises MachineError when it cannot be opened or
    somebody else has it.
    """

    simulated = False

    def __init__(
        self,
        url: str,
        baud: int = 115200,
        *,
        coil: str = "",
        lock_folder: Path | None = None,
        open_line: Callable[[str, int], Line] | None = None,
        trace: LineTrace | None = None,
    ) -> None:
        self.url = url
        self._is_socket = url.startswith("socket://")
        self._trace = trace
        self._lost: str | None = None
        self._lock = PortLock(url, coil=coil, folder=lock_folder)
        try:
            self._line: Line | None = (open_line or open_serial)(url, baud)
        except BaseException:
            self._lock.release()
            raise

    def now(self) -> float:
        """Seconds on the computer's monotonic clock."""
        return time.monotonic()

    def read(self, max_wait_s: float) -> bytes:
        """What has come; waits at most `max_wait_s` for a first byte. Raises LinkLost."""
        with self._link() as line:
            if line.timeout != max_wait_s:  # setting it costs several system calls
                line.timeout = max_wait_s
            got = bytearray(line.read(1))
            if got and self._is_socket:  # which says of any number of bytes that one is waiting
                line.timeout = 0
                got += line.read(READ_LIMIT - 1)
            while got and not self._is_socket and len(got) < READ_LIMIT and (waiting := line.in_waiting):
                got += line.read(min(waiting, READ_LIMIT - len(got)))
        data = bytes(got)
        if data and self._trace is not None:
            self._trace.add(time.monotonic(), FROM_BOARD, data)
        return data

    def write(self, data: bytes) -> None:
        """Hand `data` to the line. Raises LinkLost, also when the line does not take it in time."""
        if not data:
            return
        if self._trace is not None:
            self._trace.add(time.monotonic(), TO_BOARD, data)
        with self._link() as line:
            line.write(data)

    def name_coil(self, coil: str) -> None:
        """Name the coil in the lock file, for another process that wants this port."""
        self._lock.name_coil(coil)

    def close(self) -> None:
        """Give the line and its lock back. Safe to call twice, and on a lost line."""
        line, self._line = self._line, None
        # pyserial 3.5 forgets a socket without closing it where the far end has reset it.
        socket = getattr(line, "_socket", None)
        try:
            with suppress(*line_failures()):  # a line that is gone has nothing left to give back
                if line is not None:
                    line.close()
            if socket is not None:
                socket.close()
        finally:
            self._lock.release()

    @contextmanager
    def _link(self) -> Iterator[Line]:
        """The one place where a failure of the line gets its name."""
        if self._lost is not None:
            raise LinkLost(self._lost)
        if self._line is None:
            raise LinkLost(f"the line on {self.url} is closed")
        try:
            yield self._line
        except line_failures() as error:
            self._lost = (
                f"the line on {self.url} is lost: {error or type(error).__name__}; "
                "check plug and power of the board, then go on with `windctl resume`"
            )
            raise LinkLost(self._lost) from error


def line_failures() -> tuple[type[Exception], ...]:
    """Every exception by which pyserial 3.5 reports that a line is gone, on any platform.

    SerialException, its time-outs and what sockets raise are OSErrors, and so is PermissionError;
    termios.error is not. A port closed under a reader ends as TypeError (no descriptor), ValueError
    (descriptor -1) or AttributeError (no socket), depending on the kind of line.
    """
    lost: tuple[type[Exception], ...] = (OSError, TypeError, ValueError, AttributeError)
    if sys.platform == "win32":
        return lost
    import termios

    return (*lost, termios.error)


def open_serial(url: str, baud: int) -> Line:
    """Open `url` with pyserial: 8N1, no flow control. Raises MachineError."""
    import serial

    try:
        line: Line = serial.serial_for_url(
            url, baudrate=baud, timeout=0.01, write_timeout=WRITE_TIMEOUT_S, exclusive=True
        )
    except line_failures() as error:
        raise MachineError(_cannot_open(url, baud, error)) from error
    return line


def _cannot_open(url: str, baud: int, error: Exception) -> str:
    import errno
    import os

    code = getattr(error, "errno", None)
    cause = error.__cause__ or error.__context__ or error
    if code in (errno.EAGAIN, errno.EWOULDBLOCK, errno.EBUSY):
        advice = "another program has it open: close that one first"
    elif code in (errno.EACCES, errno.EPERM) or isinstance(cause, PermissionError):
        advice = (
            "another program has it open, or this user may not use serial ports (on Linux: group dialout)"
        )
    else:
        advice = "`windctl machine ports` lists the ports there are"
    # pyserial wraps the system's words in its own, with the number and the name twice
    why = "there is no such port" if code == errno.ENOENT else os.strerror(code) if code else str(error)
    return f"cannot open port {url} at {baud} baud: {why}; {advice}"
