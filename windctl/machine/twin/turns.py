"""Whole turns of the spindle: the mean tension of each, and whether the index pulse comes where it should.

Widths in the firmware: turn end, index i32; sum u32 over at most 65535 ticks; tension, phase u16.
"""

from __future__ import annotations

from typing import Final

M32: Final = 0xFFFFFFFF
LONGEST_TURN: Final = 0xFFFF  # ticks; the mean tension of a slower turn is not taken


class Turns:
    """Where the present turn ends, and what is known of the last one. Boundaries lie where they lie:
    a datum moves them along with the count, so that the index keeps its place in the turn."""

    __slots__ = (
        "_began",
        "_index_at",
        "_index_known",
        "_index_place",
        "_whole",
        "counts_per_turn",
        "end",
        "tension",
        "tension_sum",
    )

    def __init__(self) -> None:
        self.tension_sum = 0  # of the ticks of this turn
        self.tension = 0  # mean of the last whole turn
        self._index_at = 0  # count at the last index, or at the start
        self.configure(1, 0)

    def configure(self, counts_per_turn: int, count: int) -> None:
        """Begin to count turns of another length."""
        self.counts_per_turn = counts_per_turn
        self.end = count + counts_per_turn
        self.tension = 0
        self._whole = False
        self._began = 0  # tick
        self._index_known = False
        self._index_place = 0  # counts from where a turn begins

    def start(self, ticks: int, count: int) -> None:
        """Winding begins: the turn that is under way now is not a whole one."""
        self._whole = False
        self._began = ticks
        self.tension_sum = 0
        self._index_at = count

    def move(self, by: int) -> None:
        """The count was set anew, `by` counts away; where the index stands in it must be learnt again."""
        self.end += by
        self._index_known = False

    def back(self, count: int) -> None:
        """The count went back."""
        while count < self.end - self.counts_per_turn:
            self.end -= self.counts_per_turn

    def passed(self, ticks: int, count: int) -> bool:
        """The count reached `end`. True if the turn that ends was whole, so that `tension` is new."""
        while count >= self.end:
            self.end += self.counts_per_turn
        n = (ticks - self._began) & M32
        fresh = self._whole and 0 < n <= LONGEST_TURN
        if fresh:
            self.tension = self.tension_sum // n
        self._whole = True
        self._began = ticks
        self.tension_sum = 0
        return fresh

    def index(self, count: int, counted: int) -> int:
        """The index pulse came within the last `counted` counts. Returns counts away from its place."""
        place = count - (counted // 2 if counted > 0 else 0) - (self.end - self.counts_per_turn)
        self._index_at = count
        if not self._index_known:
            self._index_known = True
            self._index_place = place
            return 0
        off = place - self._index_place
        half = self.counts_per_turn // 2
        if off > half:
            off -= self.counts_per_turn
        elif off < -half:
            off += self.counts_per_turn
        return off if off >= 0 else -off

    def since_index(self, count: int) -> int:
        """Counts since the last index, or since the start."""
        return count - self._index_at
