"""The program: inert integer arrays, how far the guide goes while the spindle turns so many counts."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

MOST_COUNTS = 65_535  # of one segment: u16 on the wire
MOST_STEPS = 32_767  # of one segment: i16 on the wire
_WIRE = np.dtype([("counts", "<u2"), ("guide", "<i2")])


@dataclass(frozen=True, slots=True)
class Place:
    """Where a count lies: segment `index`, `into` counts of it wound, and the guide (motor steps) there."""

    index: int
    into: int
    guide: int


@dataclass(frozen=True, eq=False)
class Program:
    """Segments in the order in which they are wound. Equal programs have equal digests.

    counts: u16[n], spindle counts of each segment, at least 1.
    guide: i16[n], guide motor steps of each, |guide| <= counts; positive leads away from the start flange.
    The guide's datum 0 is where it starts: at the turn-round point next to the start flange, reached moving
    away from that flange, so that the drive's play is taken up in that direction.
    backlash_steps: the drive's play that the program takes up by itself. After every turn-round the motor
    makes this many steps more than the guide travels, so motor positions run from -backlash_steps to the
    stroke.
    """

    counts: NDArray[np.uint16]
    guide: NDArray[np.int16]
    counts_per_turn: int
    steps_per_mm: float
    start_guide: int = 0
    backlash_steps: int = 0

    def __post_init__(self) -> None:
        """Makes the arrays read-only. Raises ValueError for what no board would take."""
        if self.counts.dtype != np.uint16 or self.guide.dtype != np.int16:
            raise ValueError(f"segments are u16 and i16, not {self.counts.dtype} and {self.guide.dtype}")
        if self.counts.shape != self.guide.shape or self.counts.ndim != 1 or not len(self.counts):
            raise ValueError("a program has as many guide values as counts, and at least one")
        if not self.counts.all():
            raise ValueError("a segment has at least one count")
        if (np.abs(self.guide.astype(np.int64)) > self.counts).any():
            raise ValueError("a segment has at most as many guide steps as counts")
        self.counts.setflags(write=False)
        self.guide.setflags(write=False)

    @classmethod
    def from_packed(
        cls,
        packed: bytes,
        *,
        counts_per_turn: int,
        steps_per_mm: float,
        start_guide: int = 0,
        backlash_steps: int = 0,
    ) -> Program:
        """The program of a wire form, 4 bytes a segment. Raises ValueError if it is none."""
        if len(packed) % _WIRE.itemsize:
            raise ValueError(f"{len(packed)} bytes are not whole segments of {_WIRE.itemsize} bytes")
        segments = np.frombuffer(packed, dtype=_WIRE)
        counts = segments["counts"].astype(np.uint16)
        guide = segments["guide"].astype(np.int16)
        return cls(counts, guide, counts_per_turn, steps_per_mm, start_guide, backlash_steps)

    def packed(self) -> bytes:
        """The wire form: u16 counts, i16 guide steps, little endian, segment after segment."""
        segments = np.empty(len(self.counts), dtype=_WIRE)
        segments["counts"] = self.counts
        segments["guide"] = self.guide
        return segments.tobytes()

    @cached_property
    def digest(self) -> str:
        """SHA-256, in hex, of the header's lines of ASCII followed by the wire form."""
        header = (
            "windctl program 1\n"
            f"counts_per_turn {self.counts_per_turn}\n"
            f"steps_per_mm {float(self.steps_per_mm)!r}\n"
            f"start_guide {self.start_guide}\n"
            f"backlash_steps {self.backlash_steps}\n"
            f"segments {len(self.counts)}\n"
        )
        return hashlib.sha256(header.encode("ascii") + self.packed()).hexdigest()

    @property
    def id32(self) -> int:
        """First four bytes of the digest, big endian: what the board calls this program."""
        return int(self.digest[:8], 16)

    @property
    def segments(self) -> int:
        """Number of segments."""
        return len(self.counts)

    @cached_property
    def count_marks(self) -> NDArray[np.int64]:
        """i64[n + 1]: the count at which each segment starts, and the end."""
        return _marks(0, self.counts)

    @cached_property
    def guide_marks(self) -> NDArray[np.int64]:
        """i64[n + 1]: the guide motor's position, in steps from the datum, at each of `count_marks`."""
        return _marks(self.start_guide, self.guide)

    @property
    def total_counts(self) -> int:
        """Counts from the first to the last."""
        return int(self.count_marks[-1])

    @property
    def turns(self) -> float:
        """Turns that the program covers."""
        return self.total_counts / self.counts_per_turn

    def place_of(self, count: int) -> Place:
        """Where `count` lies; before the start is the start, past the end is the end.

        Within a segment of N counts and G steps the guide follows the board's line: after k counts it has
        gone sign(G) * floor((k * |G| + N // 2) / N) steps.
        """
        count = max(count, 0)
        if count >= self.total_counts:
            return Place(self.segments, 0, int(self.guide_marks[-1]))
        index = int(np.searchsorted(self.count_marks, count, side="right")) - 1
        into = count - int(self.count_marks[index])
        n, steps = int(self.counts[index]), int(self.guide[index])
        way = (into * abs(steps) + n // 2) // n
        return Place(index, into, int(self.guide_marks[index]) + (way if steps >= 0 else -way))


def _marks(start: int, deltas: NDArray[np.uint16] | NDArray[np.int16]) -> NDArray[np.int64]:
    marks = np.empty(len(deltas) + 1, dtype=np.int64)
    marks[0] = start
    np.cumsum(deltas, dtype=np.int64, out=marks[1:])
    marks[1:] += start
    marks.setflags(write=False)
    return marks
