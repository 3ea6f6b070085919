"""Whoever puts the leads of a simulated contact together, and the contact back on the wire afterwards."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from windctl.run.zero_seen import ZeroSeen


class SimulatedLeads:
    """`connect`: puts the contact on a resistor of so many ohm; None: on the wire."""

    def __init__(self, connect: Callable[[float | None], None]) -> None:
        self._connect = connect
        self._joined = False
        self._read = False  # since they were joined, the run was seen to read them

    def join(self) -> None:
        """Puts them together. To be called before the run is told so."""
        self._connect(0.0)
        self._joined, self._read = True, False

    def mind(self, seen: ZeroSeen | None) -> None:
        """Puts the contact back once they have been read, or nobody wants them read any more."""
        if not self._joined:
            return
        if seen is not None and seen.together:
            self._read = True
        elif self._read or seen is None or not seen.wanted:
            self._connect(None)
            self._joined = False
