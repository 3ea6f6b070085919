"""The seam under every machine: bytes in, bytes out, and the time that goes with them."""

from __future__ import annotations

from typing import Protocol


class Port(Protocol):
    """One line to one board. Only the thread that opened a port uses and closes it.

    Every failure of the line, whatever the platform calls it, leaves as `windctl.errors.LinkLost`.
    """

    @property
    def simulated(self) -> bool:
        """True where time is simulated: such a port stands still while nobody reads."""
        ...

    def now(self) -> float:
        """Seconds on this port's own clock: monotonic, with an arbitrary zero."""
        ...

    def read(self, max_wait_s: float) -> bytes:
        """What came from the board, waiting at most `max_wait_s` on this port's clock for a first byte."""
        ...

    def write(self, data: bytes) -> None:
        """Hand bytes to the line; returns before they are on the wire."""
        ...

    def close(self) -> None:
        """Give the line back. Safe to call twice."""
        ...
