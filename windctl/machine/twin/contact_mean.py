"""The contact's reading: a boxcar of 100 ticks, averaged over a window.

100 ms are whole cycles of 50 and of 60 Hz, so the boxcar leaves nothing of the mains hum that thousands of
turns pick up. A window taken while the spindle turns is made longer until it covers whole revolutions, so
that nothing is left of what a wobbling axis generates once a turn either. Readings do not share samples.
Widths in the firmware: samples u16, boxcar u32, ring 100 x u16, sum over the window u64, counts i32.
"""

from __future__ import annotations

from typing import Final

BOX: Final = 100  # ticks
WINDOW_LIMIT: Final = 6000  # ticks that may be asked for
LONGEST: Final = 60000  # ticks; a revolution slower than this is not waited for
OPEN: Final = 0xFFFF  # a sample at the end of the scale


class ContactMean:
    """Averages samples into readings, one after the other, as `start` asked."""

    __slots__ = (
        "_at",
        "_box",
        "_count_first",
        "_filled",
        "_turn_end",
        "_turning",
        "active",
        "counts_per_turn",
        "every",
        "middle",
        "open",
        "ring",
        "started",
        "sum",
        "turned",
        "waiting",
        "window",
        "window_ticks",
    )

    def __init__(self) -> None:
        self.ring = [0] * BOX
        self.active = False  # readings are wanted
        self.waiting = False  # for the next reading's time
        self.window = 0  # ticks asked for
        self.every = 0
        self.counts_per_turn = 1
        self.started = 0  # tick of the first sample
        self.turned = False  # results: see `sample`
        self.middle = 0
        self.window_ticks = 0
        self.sum = 0
        self.open = False
        self._turning = False
        self._count_first = 0
        self._filled = 0  # samples in the boxcar
        self._at = 0  # place of the next one
        self._box = 0  # sum over it
        self._turn_end = 0  # count that completes a revolution

    def start(self, window: int, every: int, ticks: int, count: int, turning: bool) -> None:
        """Readings over `window` ticks, a new one every `every` ticks at the earliest; window 0 ends them."""
        self.active = window != 0
        self.window = window
        self.every = every
        self._begin(ticks, count, turning)

    def sample(self, contact: int, ticks: int, count: int, turning: bool) -> bool:
        """Take one tick's sample. True when it completes a reading, which then stands in the fields:

        `value` (1/16 unit), `middle` (count at the middle of it), `window_ticks`, `turned`, `open`.
        """
        if self.waiting:
            if ((ticks - self.started) & 0xFFFFFFFF) < self.every:
                return False
            self._begin(ticks, count, turning)
        elif turning != self._turning or self.window_ticks == LONGEST:
            self._begin(ticks, count, turning)
        if contact == OPEN:
            self.open = True
        at = self._at
        box = self._box + contact - self.ring[at]
        self.ring[at] = contact
        self._box = box
        self._at = at + 1 if at < BOX - 1 else 0
        if self._filled < BOX:
            self._filled += 1
            if self._filled < BOX:
                return False
            self._turn_end = count + self.counts_per_turn
        n = self.window_ticks
        whole = True
        if turning:
            if count < self._turn_end:
                whole = False
            else:
                self._turn_end += self.counts_per_turn
        if whole and n >= self.window:
            self._finish(count)
            return True
        self.window_ticks = n + 1
        self.sum += box
        return False

    @property
    def value(self) -> int:
        """The mean, in 1/16 of the contact's unit, rounded to nearest."""
        divisor = BOX * self.window_ticks
        return (16 * self.sum + divisor // 2) // divisor

    def _begin(self, ticks: int, count: int, turning: bool) -> None:
        self.waiting = False
        self.started = ticks
        self._turning = turning
        self._count_first = count
        self._filled = 0
        self._at = 0
        self._box = 0
        self._turn_end = 0
        self.ring[:] = [0] * BOX
        self.window_ticks = 0
        self.sum = 0
        self.open = False

    def _finish(self, count: int) -> None:
        self.turned = self._turning
        span = count - self._count_first
        self.middle = self._count_first + (span // 2 if span >= 0 else -(-span // 2))
        if self.every:
            self.waiting = True
        else:
            self.active = False
