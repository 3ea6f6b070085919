"""The queue of segments and the line the guide follows through them. No division while following.

Within a segment of N counts and G guide steps the guide stands, after k counts, at
sign(G) * floor((k*|G| + N//2) / N) steps from where the segment began. `follow` walks that line by an
accumulator that starts at N//2 (Bresenham 1965), for which each count adds |G| and each N takes a step.
Widths in the firmware: counts u16, steps i16, accumulator u32 (at most 65535 + 65535 * 32768, which fits).
"""

from __future__ import annotations

from binascii import crc_hqx

from windctl.machine.twin.rules import CATCH_UP_COUNTS


class GuideLine:
    """Segments laid and not yet wound, and the guide's place in them.

    The line follows the spindle's high-water count: going back takes no guide step back, and is remembered
    in `behind` until the spindle has come forward again.
    """

    __slots__ = (
        "_acc",
        "_counts",
        "_left",
        "_n",
        "_sign",
        "_size",
        "_slope",
        "_steps",
        "base",
        "behind",
        "crc",
        "end",
        "executing",
        "into",
        "next",
        "pending",
        "program",
    )

    def __init__(self, size: int) -> None:
        self._size = size
        self._counts = [0] * size  # u16 each, a ring: segment i lives at i % size
        self._steps = [0] * size  # i16 each
        self.datum(program=0, count=0, first=0, into=0)

    def datum(self, program: int, count: int, first: int, into: int) -> None:
        """Empty the queue and stand at `count`, `into` counts inside segment `first`."""
        self.program = program
        self.base = self.next = self.executing = first
        self.into = into  # u16
        self.end = count  # i32: the count at which the queue ends
        self.crc = 0xFFFF  # u16, over segments base..next-1
        self.behind = 0  # counts below high water
        self.pending = 0  # counts above what the guide has followed
        self._n = self._left = 0  # u16: counts of the executing segment, and those left of it; 0: none
        self._slope = 0  # u16: |guide steps| of it
        self._sign = 1
        self._acc = 0

    @property
    def free(self) -> int:
        """Free places in the queue."""
        return self._size - ((self.next - self.executing) & 0xFFFFFFFF)

    def bad_segment(self, n: int, packed: bytes) -> int:
        """Place of the first of n segments that cannot be followed, or -1."""
        for place in range(n):
            counts, steps = _segment(packed, place)
            if counts == 0 or abs(steps) > counts:
                return place
        if self.next == self.base and self.into >= _segment(packed, 0)[0]:
            return 0
        return -1

    def length(self, n: int, packed: bytes) -> int:
        """Counts that n segments would add to the queue."""
        total = sum(_segment(packed, place)[0] for place in range(n))
        return total - self.into if self.next == self.base else total

    def append(self, n: int, packed: bytes) -> None:
        """Lay n segments that were checked before."""
        self.end += self.length(n, packed)
        self.crc = crc_hqx(packed[: 4 * n], self.crc)
        for place in range(n):
            at = self.next % self._size
            self._counts[at], self._steps[at] = _segment(packed, place)
            self.next = (self.next + 1) & 0xFFFFFFFF
            if self._left == 0:
                self._begin()

    def follow(self, counts: int) -> int:
        """Guide steps for this many counts, signed, with the spindle driven and the guide powered.

        What is pending from before is caught up with besides, at 16 counts a call.
        """
        if self.behind or self.pending or counts <= 0:
            before = self.pending
            self.wait(counts)
            counts = self.pending - before + min(before, CATCH_UP_COUNTS)
            self.pending -= counts
        return self._walk(counts) if counts >= self._left else self._advance(counts)

    def wait(self, counts: int) -> None:
        """Count without following: the guide is not powered, or follows later."""
        if counts <= self.behind:  # also every way back
            self.behind -= counts
        else:
            self.pending += counts - self.behind
            self.behind = 0

    @property
    def lagging(self) -> bool:
        """The guide has a way to go that segments already tell."""
        return self.pending != 0 and self._left != 0

    def catch_up(self) -> int:
        """Follow what is pending, at rest: at most one step and 16 counts in a tick."""
        for _ in range(CATCH_UP_COUNTS):
            if not self.lagging:
                return 0
            self.pending -= 1
            step = self._walk(1)
            if step:
                return step
        return 0

    def _walk(self, counts: int) -> int:
        """Along the line over the ends of segments; counts beyond the last are pending."""
        steps = 0
        while counts >= self._left:
            if self._left == 0:  # out of segments
                self.pending += counts
                return steps
            counts -= self._left
            steps += self._advance(self._left)
            self.executing = (self.executing + 1) & 0xFFFFFFFF
            if self.executing != self.next:
                self._begin()
        return steps + self._advance(counts)

    def _begin(self) -> None:
        at = self.executing % self._size
        self._n = n = self._counts[at]
        steps = self._steps[at]
        self._slope = abs(steps)
        self._sign = -1 if steps < 0 else 1
        wound = self.into if self.executing == self.base else 0
        self._left = n - wound
        self._acc = (n // 2 + wound * self._slope) % n

    def _advance(self, counts: int) -> int:
        """Along the line within the executing segment."""
        self._left -= counts
        acc = self._acc + counts * self._slope
        n = self._n
        steps = 0
        while acc >= n:
            acc -= n
            steps += self._sign
        self._acc = acc
        return steps


def _segment(packed: bytes, place: int) -> tuple[int, int]:
    at = 4 * place
    steps = packed[at + 2] | packed[at + 3] << 8
    return packed[at] | packed[at + 1] << 8, steps - 0x10000 if steps & 0x8000 else steps
