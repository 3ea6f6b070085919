"""The curve so far, collected look by look and thinned evenly, so that it never grows."""

from __future__ import annotations

from collections.abc import Iterable

from windctl.tui.pictures.curve import Point

MOST = 400


class Trail:
    """Points in order of turns, about `MOST` at most."""

    def __init__(self, points: Iterable[Point] = ()) -> None:
        self._points = list(points)
        self._spacing = 0.0

    @property
    def points(self) -> list[Point]:
        """All points; the last is the latest."""
        return self._points

    def add(self, point: Point) -> bool:
        """Keep the point if it is far enough on; True if it was kept."""
        last = self._points[-1].turn if self._points else -1.0
        if point.ohm is None or point.turn - last < max(self._spacing, 1e-9):
            return False
        self._points.append(point)
        if len(self._points) > MOST:
            self._points = self._points[1::2]
            self._spacing = 2.0 * point.turn / MOST
        return True
