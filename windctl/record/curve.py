"""Resistance over turns, thinned to what an eye or a query needs; the record itself keeps all."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from windctl.forecast.finish import finish_at, so_far
from windctl.record.events import Event, ReadingTaken, ReadingTakenBack, ReadingTyped
from windctl.record.fold import State, fold, start

MOST_POINTS = 500


@dataclass(frozen=True, slots=True)
class CurvePoint:
    """What was known after a reading at `turn`: resistance so far and forecast finish, ohm at 20 C."""

    turn: float
    ohm_20c: float
    final_ohm: float
    final_sd: float


@dataclass(frozen=True, slots=True)
class Review:
    """A coil's facts folded once: its last state and its curve."""

    state: State
    curve: tuple[CurvePoint, ...]


def review(events: Iterable[Event]) -> Review:
    """Fold all facts of a coil and take its curve on the way, at most `MOST_POINTS` points.

    Points are dropped evenly: whenever there are too many, every other one goes and the spacing doubles.
    Typed readings are points only where nothing else can read: curves sealed before stay as they are.
    """
    state = start()
    points: list[CurvePoint] = []
    spacing = 1
    used = 0
    for event in events:
        state = fold(state, event)
        by_eye = state.by_eye and isinstance(event, ReadingTyped | ReadingTakenBack)
        if not (by_eye or isinstance(event, ReadingTaken)) or state.readings_used == used:
            continue
        if state.readings_used < used:  # taken back
            used = state.readings_used
            points = points[:-1]
            continue
        used = state.readings_used
        if used % spacing == 0 and state.reading is not None:
            points.append(_point(state))
            if len(points) > MOST_POINTS:
                points = points[1::2]
                spacing *= 2
    return Review(state, tuple(points))


def _point(state: State) -> CurvePoint:
    assert state.estimate is not None and state.started is not None and state.reading is not None
    turn = state.reading.turn
    end = state.started.planned_turns
    if state.stop_point is not None:
        end = state.stop_point / state.counts_per_turn
    finish = finish_at(state.estimate, max(end, turn))
    return CurvePoint(turn, so_far(state.estimate, turn).ohm, finish.ohm, finish.sd)
