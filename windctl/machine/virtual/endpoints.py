"""Where a served machine meets its host: a TCP port or a pseudo-terminal, one client at a time."""

from __future__ import annotations

import errno
import os
import select
import socket
from contextlib import suppress
from typing import Protocol

from windctl.errors import MachineError

_READ_LIMIT = 4096


class Endpoint(Protocol):
    """One door. Nothing in it blocks, and nothing is kept for a client that is not there or does not read."""

    @property
    def url(self) -> str:
        """What a host opens, as a pyserial URL."""
        ...

    @property
    def open(self) -> bool:
        """Whether a client is there, as far as the last `read` found."""
        ...

    def wait(self, seconds: float) -> None:
        """Sleeps until something comes in or the time is over."""
        ...

    def read(self) -> bytes:
        """What came in; also sees clients come and go."""
        ...

    def write(self, data: bytes) -> None:
        """Sends what the client's buffer takes and drops the rest, as a serial line does."""
        ...

    def close(self) -> None:
        """Shuts the door."""
        ...


class TcpEndpoint:
    """Listens on `host:port`; port 0 takes a free one. Raises MachineError when it cannot."""

    def __init__(self, host: str, port: int) -> None:
        try:
            self._listener = socket.create_server((host, port))
        except OSError as error:
            raise MachineError(
                f"cannot listen on {host}:{port}: {error.strerror or error}; choose another port"
            ) from error
        self._listener.setblocking(False)
        self._client: socket.socket | None = None
        self.url = f"socket://{host}:{self._listener.getsockname()[1]}"

    @property
    def open(self) -> bool:
        return self._client is not None

    def wait(self, seconds: float) -> None:
        watched = [self._listener] if self._client is None else [self._listener, self._client]
        select.select(watched, [], [], seconds)

    def read(self) -> bytes:
        if self._client is None:
            self._welcome()
            return b""
        try:
            data = self._client.recv(_READ_LIMIT)
        except BlockingIOError:
            self._welcome()
            return b""
        except OSError:
            data = b""
        if not data:
            self._hang_up()  # the next read may find another client
        return data

    def write(self, data: bytes) -> None:
        if self._client is None or not data:
            return
        try:
            self._client.send(data)
        except BlockingIOError:
            pass
        except OSError:
            self._hang_up()

    def close(self) -> None:
        self._hang_up()
        self._listener.close()

    def _welcome(self) -> None:
        try:
            newcomer, _ = self._listener.accept()
        except (BlockingIOError, ConnectionError):
            return
        if self._client is not None:  # one port has one user
            newcomer.close()
            return
        newcomer.setblocking(False)
        newcomer.setsockopt(socket.IPPROTO_TCP, socket.TCP_NODELAY, 1)
        self._client = newcomer

    def _hang_up(self) -> None:
        client, self._client = self._client, None
        if client is not None:
            client.close()


class PtyEndpoint:
    """A pseudo-terminal, which programs open like a serial device. POSIX only: MachineError elsewhere."""

    def __init__(self) -> None:
        try:
            import tty
        except ImportError as error:
            raise MachineError(
                "this operating system has no pseudo-terminals; serve on a TCP port instead"
            ) from error
        self._master, slave = os.openpty()
        self.url = os.ttyname(slave)
        os.set_blocking(self._master, False)
        tty.setraw(slave)  # no echo before the client has set its own terms
        os.close(slave)  # from now on a hang-up says that no client has it open
        self._poll = select.poll()
        self._poll.register(self._master, select.POLLIN)
        self.open = False

    def wait(self, seconds: float) -> None:
        if self.open:
            self._poll.poll(seconds * 1000.0)
        else:
            select.select([], [], [], seconds)  # without a client, poll would return at once for ever

    def read(self) -> bytes:
        events = dict(self._poll.poll(0)).get(self._master, 0)
        self.open = not events & select.POLLHUP
        if not events & select.POLLIN:
            return b""
        try:
            return os.read(self._master, _READ_LIMIT)
        except OSError as error:
            if error.errno not in (errno.EIO, errno.EAGAIN):  # EIO: hung up meanwhile
                raise
            return b""

    def write(self, data: bytes) -> None:
        if self.open and data:
            with suppress(BlockingIOError):
                os.write(self._master, data)

    def close(self) -> None:
        os.close(self._master)
