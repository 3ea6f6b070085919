"""SerialPort on real operating system lines: pseudo terminals and TCP on the loopback address."""

from __future__ import annotations

import inspect
import os
import socket
import subprocess
import sys
import time
from collections.abc import Iterator
from io import FileIO
from pathlib import Path

import pytest
import serial
from serial import serialutil

from windctl.errors import LinkLost, MachineError
from windctl.machine.ports import Port
from windctl.machine.serial_port import READ_LIMIT, SerialPort, line_failures, open_serial

pty = pytest.importorskip("pty", reason="platform: no pseudo terminals")
termios = pytest.importorskip("termios", reason="platform: no pseudo terminals")


@pytest.fixture
def terminal() -> Iterator[tuple[FileIO, str]]:
    """The far end, and the near end's path. Closing the far end is pulling the plug."""
    import tty

    far, near = pty.openpty()
    tty.setraw(near)
    path = os.ttyname(near)
    os.close(near)
    with os.fdopen(far, "rb+", buffering=0) as far_end:
        yield far_end, path


@pytest.fixture
def port(terminal: tuple[FileIO, str], tmp_path: Path) -> Iterator[SerialPort]:
    port = SerialPort(terminal[1], lock_folder=tmp_path)
    yield port
    port.close()


def read_until(port: Port, n: int) -> bytes:
    got = b""
    end = time.monotonic() + 5
    while len(got) < n and time.monotonic() < end:
        got += port.read(0.05)
    return got


EVERY_BYTE = bytes(range(256))


def test_every_byte_passes_both_ways(terminal: tuple[FileIO, str], port: SerialPort) -> None:
    far, _ = terminal
    far.write(EVERY_BYTE)
    assert read_until(port, 256) == EVERY_BYTE
    port.write(EVERY_BYTE)
    got = b""
    while len(got) < 256:
        got += far.read(256)
    assert got == EVERY_BYTE


def test_one_read_takes_all_that_waits_and_no_more_than_its_limit(
    terminal: tuple[FileIO, str], port: SerialPort
) -> None:
    terminal[0].write(b"x" * 3000)
    time.sleep(0.05)
    assert port.read(1.0) == b"x" * 3000
    assert READ_LIMIT >= 3000


def test_a_read_waits_for_a_first_byte_and_not_longer(port: SerialPort) -> None:
    begun = port.now()
    assert port.read(0.05) == b""
    assert 0.04 <= port.now() - begun < 1.0
    assert not port.simulated


def test_pulling_the_plug_is_a_lost_link_and_stays_one(
    terminal: tuple[FileIO, str], port: SerialPort
) -> None:
    terminal[0].close()
    with pytest.raises(LinkLost, match="check plug and power") as caught:
        read_until(port, 1)
    assert terminal[1] in str(caught.value)
    with pytest.raises(LinkLost):
        port.write(b"never sent again")
    port.close()
    port.close()


def test_writing_after_the_plug_is_pulled_is_a_lost_link(
    terminal: tuple[FileIO, str], port: SerialPort
) -> None:
    terminal[0].close()
    with pytest.raises(LinkLost):
        port.write(b"x")


def test_a_line_that_takes_nothing_is_lost_after_the_write_time_limit(port: SerialPort) -> None:
    begun = port.now()
    with pytest.raises(LinkLost, match=r"[Ww]rite timeout"):
        for _ in range(100):  # nobody reads the far end: its buffer fills
            port.write(b"x" * 4096)
    assert port.now() - begun < 5


def test_closing_is_safe_twice_and_ends_reading_and_writing(port: SerialPort) -> None:
    port.close()
    port.close()
    with pytest.raises(LinkLost, match="closed"):
        port.read(0.01)
    with pytest.raises(LinkLost, match="closed"):
        port.write(b"x")


def test_the_line_closed_underneath_is_a_lost_link(terminal: tuple[FileIO, str], tmp_path: Path) -> None:
    """pyserial answers with TypeError here, because its descriptor is None."""
    line = open_serial(terminal[1], 115200)
    port = SerialPort(terminal[1], lock_folder=tmp_path, open_line=lambda _url, _baud: line)
    line.close()
    with pytest.raises(LinkLost):
        port.read(0.01)


# ---------------------------------------------------------------- TCP


@pytest.fixture
def listener() -> Iterator[socket.socket]:
    with socket.create_server(("127.0.0.1", 0)) as server:
        yield server


def test_a_tcp_line_carries_every_byte_and_ends_as_a_lost_link(
    listener: socket.socket, tmp_path: Path
) -> None:
    url = f"socket://127.0.0.1:{listener.getsockname()[1]}"
    port = SerialPort(url, lock_folder=tmp_path)
    far, _ = listener.accept()
    far.settimeout(5)
    port.write(EVERY_BYTE)
    got = b""
    while len(got) < 256:
        got += far.recv(256)
    assert got == EVERY_BYTE
    far.sendall(EVERY_BYTE)
    assert read_until(port, 256) == EVERY_BYTE
    far.close()
    with pytest.raises(LinkLost, match="disconnected"):
        read_until(port, 1)
    port.close()


def test_a_tcp_line_reset_by_the_far_end_is_lost_for_writing(listener: socket.socket, tmp_path: Path) -> None:
    import struct

    port = SerialPort(f"socket://127.0.0.1:{listener.getsockname()[1]}", lock_folder=tmp_path)
    far, _ = listener.accept()
    far.setsockopt(socket.SOL_SOCKET, socket.SO_LINGER, struct.pack("ii", 1, 0))
    far.close()  # with linger 0: a reset
    with pytest.raises(LinkLost):
        for _ in range(50):
            port.write(b"x")
            time.sleep(0.01)
    port.close()


# ---------------------------------------------------------------- the failures, one by one


class FakeLine:
    """A line that fails in one method with one exception."""

    timeout: float | None = None

    def __init__(self, fails_in: str, error: BaseException) -> None:
        self.fails_in, self.error = fails_in, error

    def _do(self, what: str) -> None:
        if what == self.fails_in:
            raise self.error

    @property
    def in_waiting(self) -> int:
        self._do("in_waiting")
        return 0

    def read(self, size: int = 1, /) -> bytes:
        self._do("read")
        return b"x" * size

    def write(self, data: bytes, /) -> int | None:
        self._do("write")
        return len(data)

    def close(self) -> None:
        self._do("close")


# Of pyserial 3.5: every exception class it defines, and what its methods let through from below (see the
# library's serialposix, serialwin32 and protocol_socket modules).
OWN = [
    cls() if cls is serialutil.PortNotOpenError else cls("gone")
    for _, cls in inspect.getmembers(serialutil, inspect.isclass)
    if issubclass(cls, Exception) and cls.__module__ == serialutil.__name__
]
BELOW = [
    OSError(5, "Input/output error"),  # in_waiting of an unplugged USB adapter
    OSError(9, "Bad file descriptor"),
    PermissionError(13, "Access is denied"),  # Windows, on unplugging
    BrokenPipeError(32, "Broken pipe"),
    ConnectionResetError(104, "Connection reset by peer"),
    TimeoutError("timed out"),
    termios.error(5, "Input/output error"),  # flush, reconfiguring
    TypeError("an integer is required (got type NoneType)"),  # closed in another thread
    ValueError("file descriptor cannot be a negative integer (-1)"),  # closed socket in select
    AttributeError("'NoneType' object has no attribute 'recv'"),
]


def test_pyserial_has_no_exception_that_is_not_listed() -> None:
    assert {type(error).__name__ for error in OWN} == {
        "SerialException",
        "SerialTimeoutException",
        "PortNotOpenError",
    } or serial.VERSION != "3.5"
    assert all(isinstance(error, line_failures()) for error in OWN)


@pytest.mark.parametrize("where", ["read", "in_waiting", "write"])
@pytest.mark.parametrize("error", OWN + BELOW, ids=lambda error: type(error).__name__)
def test_every_failure_is_a_lost_link(where: str, error: Exception, tmp_path: Path) -> None:
    port = SerialPort("fake", lock_folder=tmp_path, open_line=lambda _url, _baud: FakeLine(where, error))
    with pytest.raises(LinkLost) as caught:
        port.write(b"x")
        port.read(0.01)
    assert caught.value.__cause__ is error
    port.close()


@pytest.mark.parametrize("error", OWN + BELOW, ids=lambda error: type(error).__name__)
def test_closing_a_dead_line_is_quiet_and_frees_the_port(error: Exception, tmp_path: Path) -> None:
    port = SerialPort("fake", lock_folder=tmp_path, open_line=lambda _url, _baud: FakeLine("close", error))
    port.close()
    SerialPort("fake", lock_folder=tmp_path, open_line=lambda _url, _baud: FakeLine("", error)).close()


def test_what_is_not_the_lines_fault_is_not_called_a_lost_link(tmp_path: Path) -> None:
    port = SerialPort(
        "fake", lock_folder=tmp_path, open_line=lambda _u, _b: FakeLine("read", KeyboardInterrupt())
    )
    with pytest.raises(KeyboardInterrupt):
        port.read(0.01)
    port.close()


# ---------------------------------------------------------------- opening


@pytest.mark.parametrize(
    ("url", "says"),
    [
        ("/dev/no-such-port", "machine ports"),
        ("nonsense://x", "machine ports"),
        ("socket://127.0.0.1:1", "machine ports"),
    ],
)
def test_a_port_that_cannot_be_opened_is_a_machine_error(url: str, says: str, tmp_path: Path) -> None:
    with pytest.raises(MachineError, match=says) as caught:
        SerialPort(url, lock_folder=tmp_path)
    assert url in str(caught.value)
    with pytest.raises(MachineError):  # and its lock is free again: the same error, not "in use"
        SerialPort(url, lock_folder=tmp_path)


def test_a_port_that_another_program_has_open_says_so(terminal: tuple[FileIO, str], tmp_path: Path) -> None:
    other = serial.Serial(terminal[1], exclusive=True)
    with pytest.raises(MachineError, match="another program has it open"):
        SerialPort(terminal[1], lock_folder=tmp_path)
    other.close()


def test_loading_the_module_does_not_load_pyserial() -> None:
    code = (
        "import sys; import windctl.machine.serial_port, windctl.machine.ports_listed; "
        "print([m for m in sys.modules if m == 'serial' or m.startswith('serial.')])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
