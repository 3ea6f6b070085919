"""How often the run screen is drawn: its digits eight times a second, figures and charts twice, and rarely
over a slow line.

A slow line shows by what it leaves waiting. Pure: time and backlog are handed in.
"""

from __future__ import annotations

from collections import deque
from typing import NamedTuple

DIGITS_S, CHARTS_S = 0.125, 0.5
SLOW_DIGITS_S, SLOW_CHARTS_S = 1.0, 10.0
BEHIND = 2  # pieces of output waiting, from which the line counts as behind
OFTEN = 3  # so often behind within a while makes a line slow
WHILE_S = 10.0
FORGIVEN_S = 60.0  # without falling behind, after which it is tried as a quick one again
_EARLY_S = 0.02  # a timer that comes a little early still counts


class Due(NamedTuple):
    """What is to be drawn now."""

    texts: bool
    charts: bool


class Pace:
    """Remembers when what was drawn, and how often the line fell behind."""

    def __init__(self) -> None:
        self.slow = False
        self._behind: deque[float] = deque(maxlen=OFTEN)
        self._texts_at = self._charts_at = float("-inf")

    def due(self, now: float, backlog: int, *, covered: bool = False) -> Due:
        """What to draw at `now`; nothing while the line is behind. `covered`: by a dialog, through which the
        whole screen is sent anew with every change; then rarely, and over a slow line not at all."""
        if backlog > BEHIND:
            self._behind.append(now)
            if len(self._behind) == OFTEN and now - self._behind[0] <= WHILE_S:
                self.slow = True
            return Due(False, False)
        if self.slow and now - self._behind[-1] > FORGIVEN_S:
            self.slow = False
        if covered and self.slow:
            return Due(False, False)
        rarely = covered or self.slow
        texts_s, charts_s = (SLOW_DIGITS_S, SLOW_CHARTS_S) if rarely else (DIGITS_S, CHARTS_S)
        due = Due(now - self._texts_at >= texts_s - _EARLY_S, now - self._charts_at >= charts_s - _EARLY_S)
        if due.texts:
            self._texts_at = now
        if due.charts:
            self._charts_at = now
        return due
