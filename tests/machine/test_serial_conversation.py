"""Port, conversation and virtual board together, in real time: over a pseudo terminal and over TCP."""

from __future__ import annotations

import os
import socket
import sys
import threading
import time
from collections.abc import Callable, Iterator
from itertools import count
from pathlib import Path

import pytest

from windctl.errors import LinkLost, MachineError
from windctl.machine.serial_port import SerialPort
from windctl.machine.twin.board import Board
from windctl.machine.twin.signals import Inputs, Outputs
from windctl.protocol.conversation import Conversation
from windctl.protocol.messages import Status
from windctl.protocol.wants import Wants

pytestmark = pytest.mark.skipif(sys.platform == "win32", reason="platform: no pseudo terminals")


class FarEnd:
    """A board in real time, in its own thread. It starts `asleep_s` late, after some noise."""

    def __init__(self, read: Callable[[], bytes], write: Callable[[bytes], object], asleep_s: float) -> None:
        self._read, self._write = read, write
        self._asleep_s = asleep_s
        self._ends = threading.Event()
        self._thread = threading.Thread(target=self._run, name="far end")
        self._thread.start()

    def close(self) -> None:
        self._ends.set()
        self._thread.join(10)
        assert not self._thread.is_alive()

    def _run(self) -> None:
        self._write(b"\x15\x30\x20 boot loader \xff")  # no delimiter: it runs into the first frame
        self._ends.wait(self._asleep_s)
        self._read()  # what was sent to a board that starts is lost
        board, inputs, outputs = Board(), Inputs(), Outputs()
        due = time.monotonic()
        while not self._ends.is_set():
            inputs.received = self._read()
            board.tick(inputs, outputs)
            if outputs.sent:
                self._write(outputs.sent)
            due += 0.001
            time.sleep(max(0.0, due - time.monotonic()))


def talk(port: SerialPort, conversation: Conversation, seconds: float) -> list[Status]:
    """Talk for a while, or until three Statuses have come."""
    heard: list[Status] = []
    end = port.now() + seconds
    while port.now() < end and len(heard) < 3:
        messages = conversation.receive(port.read(0.01), port.now())
        heard += [message for message in messages if isinstance(message, Status)]
        port.write(conversation.advance(Wants(beat=True), port.now()))
    return heard


@pytest.fixture
def terminal() -> Iterator[tuple[int, str]]:
    import pty
    import tty

    far, near = pty.openpty()
    tty.setraw(near)
    os.set_blocking(far, False)
    yield far, os.ttyname(near)
    os.close(near)


def reader(descriptor: int) -> Callable[[], bytes]:
    def read() -> bytes:
        try:
            return os.read(descriptor, 4096)
        except BlockingIOError:
            return b""

    return read


def test_a_board_that_resets_on_opening_is_waited_for(terminal: tuple[int, str], tmp_path: Path) -> None:
    far, path = terminal
    port = SerialPort(path, lock_folder=tmp_path)
    board = FarEnd(reader(far), lambda data: os.write(far, data), asleep_s=1.2)
    conversation = Conversation(count(5))
    try:
        heard = talk(port, conversation, 4.0)
        assert conversation.board.greeted
        assert len(heard) == 3
        assert heard[2].ticks - heard[1].ticks == 50
        assert conversation.counters.retries >= 3
        assert conversation.counters.bad >= 1
    finally:
        board.close()
        os.close(far)
    with pytest.raises(LinkLost):
        talk(port, conversation, 4.0)
    port.close()


def test_a_line_on_which_nobody_answers_is_a_machine_error(terminal: tuple[int, str], tmp_path: Path) -> None:
    port = SerialPort(terminal[1], lock_folder=tmp_path)
    begun = port.now()
    with pytest.raises(MachineError, match="no board answered within 3 s"):
        talk(port, Conversation(count(5)), 10.0)
    assert 2.9 < port.now() - begun < 8.0
    port.close()
    os.close(terminal[0])


def test_the_same_over_tcp(tmp_path: Path) -> None:
    with socket.create_server(("127.0.0.1", 0)) as server:
        port = SerialPort(f"socket://127.0.0.1:{server.getsockname()[1]}", lock_folder=tmp_path)
        far, _ = server.accept()
    far.setblocking(False)
    board = FarEnd(reader(far.fileno()), far.sendall, asleep_s=0.0)
    conversation = Conversation(count(5))
    try:
        assert len(talk(port, conversation, 4.0)) == 3
    finally:
        board.close()
        far.close()
    with pytest.raises(LinkLost):
        talk(port, conversation, 4.0)
    port.close()
