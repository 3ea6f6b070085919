"""The port of a bench without a board: the board's twin alone, told everything, driving nothing.

Nobody counts and nothing is powered there, so the twin is never let go: it holds the setup and the turn that
it is told, keeps the time, and answers as a board does. A run thus needs no other way for a bench that has
none. It is no simulation: the coil is real, and so is the time.
"""

from __future__ import annotations

import time
from collections.abc import Callable

from windctl.errors import LinkLost
from windctl.machine.twin.board import Board
from windctl.machine.twin.signals import Inputs, Outputs
from windctl.protocol.rules import NO_BOARD_QUEUE

_MOST_OWED = 1000  # ticks: after a longer pause of this process its time goes on from there


class ByEyePort:
    """A `windctl.machine.ports.Port` to a twin that has nothing fitted, on the computer's monotonic clock.

    The ticks that have come due are made up for when it is read, and only then.
    """

    simulated = False

    def __init__(
        self, clock: Callable[[], float] = time.monotonic, sleep: Callable[[float], None] = time.sleep
    ) -> None:
        self._board = Board(capabilities=0, queue=NO_BOARD_QUEUE)
        self._inputs, self._outputs = Inputs(), Outputs()
        self._clock, self._sleep = clock, sleep
        self._ticked_at = clock()
        self._to_board = b""
        self._closed = False

    def now(self) -> float:
        """Seconds on the computer's monotonic clock."""
        return self._clock()

    def read(self, max_wait_s: float) -> bytes:
        """What the twin says in the ticks that are due. Raises LinkLost once it is closed."""
        self._check()
        said = self._tick()
        if not said and max_wait_s > 0.0:
            self._sleep(max_wait_s)
            said = self._tick()
        return said

    def write(self, data: bytes) -> None:
        """Heard in the next tick. Raises LinkLost once it is closed."""
        self._check()
        self._to_board += data

    def close(self) -> None:
        """Nothing is to be given back. Safe to call twice."""
        self._closed = True

    def _tick(self) -> bytes:
        due = int((self._clock() - self._ticked_at) * 1000.0)
        self._ticked_at += due / 1000.0
        board, inputs, outputs = self._board, self._inputs, self._outputs
        said = bytearray()
        for _ in range(min(due, _MOST_OWED)):
            inputs.received, self._to_board = self._to_board, b""
            board.tick(inputs, outputs)
            if outputs.sent:
                said += outputs.sent
        return bytes(said)

    def _check(self) -> None:
        if self._closed:
            raise LinkLost("the bench without a board is closed")
