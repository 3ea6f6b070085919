"""What was known of a coil while it grew, told for the turns it came to have.

The book's curve keeps the forecast for the stop point of that moment, which moves. Here every moment's
estimate is asked for the same turns, those that were wound in the end, so that only knowledge changes.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from windctl.forecast.finish import finish_at, so_far
from windctl.record.curve import CurvePoint
from windctl.record.events import CoilStarted, Event, ReadingTaken, ReadingTakenBack, ReadingTyped
from windctl.record.fold import State, fold, start

_MOST = 400  # points; a line on paper shows no more


@dataclass(frozen=True, slots=True)
class History:
    """A coil's last state, and what was known before the first turn and after each reading: resistance so far
    and that of the finished coil."""

    state: State
    points: tuple[CurvePoint, ...]


def history_of(events: Iterable[Event], turns: float | None) -> History:
    """Fold all facts of a coil that came to `turns` turns (None: still open, then those planned).

    Points are dropped evenly: whenever there are too many, every other one goes and the spacing doubles.
    """
    state = start()
    points: list[CurvePoint] = []
    spacing, used, seen = 1, 0, 0
    for event in events:
        state = fold(state, event)
        if isinstance(event, CoilStarted) and state.estimate is not None:
            turns = event.planned_turns if turns is None else turns
            finish = finish_at(state.estimate, turns)
            points.append(CurvePoint(0.0, 0.0, finish.ohm, finish.sd))
        if isinstance(event, ReadingTakenBack) and state.readings_used < used:
            if seen % spacing == 0 and len(points) > 1:
                points.pop()
            used, seen = state.readings_used, seen - 1
        if not isinstance(event, ReadingTaken | ReadingTyped) or state.readings_used <= used:
            continue
        used, seen = state.readings_used, seen + 1
        if seen % spacing == 0:
            points.append(_point(state, turns or 0.0))
            if len(points) > _MOST:
                points, spacing = points[::2], spacing * 2  # the first stays
    if used and seen % spacing:
        points.append(_point(state, turns or 0.0))  # the last one counts most
    return History(state, tuple(points))


def _point(state: State, turns: float) -> CurvePoint:
    assert state.estimate is not None and state.reading is not None
    turn = state.reading.turn
    finish = finish_at(state.estimate, max(turns, turn))
    return CurvePoint(turn, so_far(state.estimate, turn).ohm, finish.ohm, finish.sd)
