"""An instrument clipped on the virtual machine: what its spindle, its line and its drives did, and when.

It sees what an observer outside the host would: the bytes that reached the board, the drive's pulses, the
spindle. One JSON object per line of the file, written when something happens:

    tick      ms since the machine was switched on; counts on through the board's resets
    what      switched_on, rebooted, opened, closed, beat, state, moving, braking, standing, count
    state     the board's state, by name
    count     counts as the board has them
    speed     steps/s the board drives
    position  motor steps the spindle has really turned
    last_beat tick at which the last Beat was received whole, or null
"""

from __future__ import annotations

import json
from typing import TextIO

from windctl.machine.virtual.bench import Bench
from windctl.protocol.frames import FrameReader
from windctl.protocol.messages import Beat, State

_COUNT_EVERY = 500  # ticks between notes of a count that changes all the time


class Trace:
    """Writes to `stream` whenever something changed; `see` is called after every tick."""

    def __init__(self, bench: Bench, stream: TextIO) -> None:
        self._bench = bench
        self._stream = stream
        self._reader = FrameReader()
        self._last_beat: int | None = None
        self._state = int(bench.board.state)
        self._rate = 0
        self._braking = False
        self._standing = True
        self._count = int(bench.board.count)
        self._count_noted = 0
        self.note("switched_on")

    def see(self, received: bytes) -> None:
        """One tick is over, in which the board received these bytes."""
        bench = self._bench
        if received:
            for frame in self._reader.feed(received):
                if frame.code == Beat.CODE:
                    self._last_beat = bench.ticks
                    self.note("beat")
        if bench.board.state != self._state:
            self._state = int(bench.board.state)
            self.note("state")
        self._watch_motion(bench.outputs.rate, bench.plant.spindle.speed)
        count = int(bench.board.count)
        if count != self._count and bench.ticks - self._count_noted >= _COUNT_EVERY:
            self.note("count")

    def note(self, what: str) -> None:
        """Writes one line, at once."""
        bench = self._bench
        self._count, self._count_noted = int(bench.board.count), bench.ticks
        line = {
            "tick": bench.ticks,
            "what": what,
            "state": State(self._state).name.lower(),
            "count": self._count,
            "speed": bench.outputs.rate,
            "position": bench.plant.position,
            "last_beat": self._last_beat,
        }
        self._stream.write(json.dumps(line) + "\n")
        self._stream.flush()

    def _watch_motion(self, rate: int, speed: int) -> None:
        if self._standing and (rate or speed):
            self._standing = False
            self.note("moving")
        if rate < self._rate and not self._braking:
            self._braking = True
            self.note("braking")
        elif rate > self._rate:
            self._braking = False
        self._rate = rate
        if not self._standing and not rate and not speed:
            self._standing = True
            self._braking = False
            self.note("standing")
