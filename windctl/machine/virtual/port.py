"""The port of a virtual machine: time is simulated, and stands still while nobody reads."""

from __future__ import annotations

import queue
import time
from collections.abc import Callable

from windctl.errors import LinkLost
from windctl.machine.plant.plant import Plant, PlantTruth
from windctl.machine.virtual.bench import Bench

_SLICE_TICKS = 20  # a paced machine shows itself at least so often
_FORGIVEN_S = 0.25  # a paced machine that falls further behind does not hurry to catch up


class VirtualPort:
    """A `windctl.machine.ports.Port` to a `Bench`.

    `speed`: 0 as fast as the computer allows, 1 real time, N so many times faster. Pacing only sleeps between
    ticks; no fact depends on it.
    """

    simulated = True

    def __init__(
        self,
        bench: Bench,
        speed: float = 0.0,
        *,
        clock: Callable[[], float] = time.monotonic,
        sleep: Callable[[float], None] = time.sleep,
    ) -> None:
        if speed < 0.0:
            raise ValueError(f"a speed of {speed:g} is less than 0")
        self._bench = bench
        self._speed = speed
        self._clock = clock
        self._sleep = sleep
        self._lost: str | None = None
        self._by_hand: queue.SimpleQueue[Callable[[Plant], None]] = queue.SimpleQueue()
        self._begun_s: float | None = None
        self._begun_tick = 0

    def now(self) -> float:
        """Simulated seconds since the machine was switched on."""
        return self._bench.ticks / 1000.0

    def read(self, max_wait_s: float) -> bytes:
        """What came from the board; simulated time goes on until a byte is there, at most `max_wait_s`."""
        self._check()
        bench = self._bench
        while not self._by_hand.empty():
            self._by_hand.get()(bench.plant)
        arrived = bench.take()
        left = max(0, round(max_wait_s * 1000.0))
        while left and not arrived:
            slice_ticks = left if self._speed == 0.0 else min(left, _SLICE_TICKS)
            left -= bench.advance(slice_ticks, until_byte=True)
            if self._speed > 0.0:
                self._pace()
            arrived = bench.take()
        return arrived

    def write(self, data: bytes) -> None:
        """Hands bytes to the line."""
        self._check()
        self._bench.send(data)

    def close(self) -> None:
        """Gives the line back; the machine stands where it is. Safe to call twice."""
        self._lost = self._lost or "the line to the virtual machine is closed"

    def unplug(self) -> None:
        """Pulls the plug: from now on the line is lost, while board and coil live on."""
        self._lost = "the line to the virtual machine is lost: its plug is pulled"
        self._bench.line.clear()

    def turn_by_hand(self, turns: float) -> None:
        """Somebody turns the spindle, once no drive holds it; negative unwinds. From any thread."""
        self._by_hand.put(lambda plant: plant.turn_by_hand(turns))

    def connect(self, ohm: float | None) -> None:
        """Somebody puts the contact's leads on `ohm` (0: together); None: on the wire. From any thread."""
        self._by_hand.put(lambda plant: plant.connect(ohm))

    def truth(self) -> PlantTruth:
        """What is really on the bobbin; for reports after a run, never for the run."""
        return self._bench.plant.truth()

    def _check(self) -> None:
        if self._lost is not None:
            raise LinkLost(self._lost)

    def _pace(self) -> None:
        now = self._clock()
        if self._begun_s is None:
            self._begun_s, self._begun_tick = now, self._bench.ticks
            return
        due = self._begun_s + (self._bench.ticks - self._begun_tick) / (1000.0 * self._speed)
        if due > now:
            self._sleep(due - now)
        elif now - due > _FORGIVEN_S:
            self._begun_s, self._begun_tick = now, self._bench.ticks
