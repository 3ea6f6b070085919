"""A serial line in simulated time: bytes take as long as they take, and an adapter may add its delay."""

from __future__ import annotations

from collections import deque

_BITS = 10  # start, eight, stop
_ADAPTER_BYTES = 62  # an adapter hands over what it has at a pause, or when so much has come
_PER_TICK = 1000 * _BITS  # a byte is worth this many units of credit, at one unit per bit per second and tick


class Way:
    """One direction. `put` hands bytes over, `pull` once per tick says which have arrived by then.

    `whole`: they arrive as from an adapter that waits for a pause on the line or a full packet; else byte by
    byte, as a UART's interrupt sees them.
    """

    __slots__ = ("_baud", "_credit", "_flying", "_latency", "_queue", "_whole", "busy")

    def __init__(self, baud: int, latency_ticks: int, *, whole: bool) -> None:
        self._baud = baud
        self._latency = latency_ticks
        self._whole = whole
        self._queue = bytearray()
        self._credit = 0
        self._flying: deque[tuple[int, bytes]] = deque()
        self.busy = False

    def put(self, data: bytes) -> None:
        """Bytes to send, after those already waiting."""
        self._queue += data
        self.busy = True

    def pull(self, tick: int) -> bytes:
        """What arrives at `tick`; to be called every tick while `busy`."""
        queue = self._queue
        if queue:
            self._credit += self._baud
            n = min(self._credit // _PER_TICK, len(queue))
            if self._whole and n < min(len(queue), _ADAPTER_BYTES):
                n = 0
            if n:
                self._flying.append((tick + self._latency, bytes(queue[:n])))
                del queue[:n]
                self._credit = self._credit - n * _PER_TICK if queue else 0
        arrived = b""
        flying = self._flying
        while flying and flying[0][0] <= tick:
            arrived += flying.popleft()[1]
        self.busy = bool(queue or flying)
        return arrived

    def clear(self) -> None:
        """The line is cut: what is on it is lost."""
        self._queue.clear()
        self._flying.clear()
        self._credit = 0
        self.busy = False


class SerialLine:
    """Both ways at one speed. `latency_ticks`: what an adapter adds each way."""

    __slots__ = ("to_board", "to_host")

    def __init__(self, baud: int = 115_200, latency_ticks: int = 0) -> None:
        self.to_board = Way(baud, latency_ticks, whole=False)
        self.to_host = Way(baud, latency_ticks, whole=True)

    def clear(self) -> None:
        """The line is cut: what is on it is lost."""
        self.to_board.clear()
        self.to_host.clear()
