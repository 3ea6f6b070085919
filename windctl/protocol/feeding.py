"""Feeding the program to the board: which segments to lay next, and whether what lies there is the program.

The board keeps a running CRC-16 over the segments as it was given them; the same sum here, for every place of
the program, tells whether the two agree.
"""

from __future__ import annotations

from array import array
from binascii import crc_hqx

from windctl.protocol.frames import CRC_START
from windctl.protocol.messages import SEGMENTS_PER_LAY, Lay, State
from windctl.protocol.picture import BoardPicture
from windctl.protocol.wants import Segments

_SEGMENT = 4  # bytes


class Feed:
    """One program on its way to the board. `program` is the one wanted last."""

    __slots__ = ("_base", "_sums", "program")

    def __init__(self) -> None:
        self.program: Segments | None = None
        self._base = 0
        self._sums = array("H", [CRC_START])  # over the segments from _base, by how many

    def want(self, program: Segments | None) -> None:
        """Take up another program, or go on with the same one."""
        if program is not self.program and program != self.program:
            self._restart(self._base)
        self.program = program

    def crc(self, base: int, upto: int) -> int | None:
        """CRC-16 over segments base .. upto-1; None if the program has no such stretch."""
        program = self.program
        if program is None or not 0 <= base <= upto <= program.n:
            return None
        if base != self._base:
            self._restart(base)
        sums = self._sums
        while len(sums) <= upto - base:  # each segment is summed once, however often it is asked for
            at = (base + len(sums) - 1) * _SEGMENT
            sums.append(crc_hqx(program.packed[at : at + _SEGMENT], sums[-1]))
        return sums[upto - base]

    def agrees(self, picture: BoardPicture) -> bool | None:
        """Whether the board has laid this program and nothing else; None while that cannot be told yet."""
        if self.program is None:
            return None
        if picture.program != self.program.id32:
            return False
        status, identity = picture.status, picture.identity
        if status is not None:
            if status.ticks == picture.placed_at:
                return None
            return self.crc(picture.base, status.next) == status.program_crc
        if identity is not None and picture.greeted:
            return self.crc(identity.base, identity.next) == identity.program_crc
        return None

    def next_lay(self, picture: BoardPicture) -> Lay | None:
        """The segments to lay now: as many as fit; None if the queue is full, or everything is laid.

        While turning, waits until a whole message's worth of places is free, so that the line stays free.
        """
        program = self.program
        if program is None or picture.program != program.id32 or picture.queue == 0:
            return None
        first = picture.next
        left = program.n - first
        free = picture.queue - picture.lead_segments
        n = min(SEGMENTS_PER_LAY, left, free)
        if n <= 0 or first < picture.base:
            return None
        if picture.state == State.TURNING and n < min(SEGMENTS_PER_LAY, left, picture.queue // 2):
            return None
        packed = program.packed[first * _SEGMENT : (first + n) * _SEGMENT]
        return Lay(program.id32, first, n, packed.ljust(SEGMENTS_PER_LAY * _SEGMENT, b"\0"))

    def all_laid(self, picture: BoardPicture) -> bool:
        """Whether the board has been given the whole program."""
        program = self.program
        return program is not None and picture.program == program.id32 and picture.next >= program.n

    def _restart(self, base: int) -> None:
        self._base = base
        self._sums = array("H", [CRC_START])
