"""What lies ahead of a coil, for eyes: the forecast at a few turns from here to the stop.

Made from the folded facts when somebody looks, like a snapshot, and less often: it costs more.
"""

from __future__ import annotations

from dataclasses import dataclass

from windctl.forecast.estimator import Estimate, begin
from windctl.forecast.finish import finish_at
from windctl.plan.prior import Prior
from windctl.record.fold import State

FAN_POINTS = 9


@dataclass(frozen=True, slots=True)
class Ahead:
    """Resistance at 20 °C once `turn` turns are wound, ohm, and the half-width of its 95 % interval."""

    turn: float
    ohm: float
    u95: float


def outlook(state: State) -> tuple[Ahead, ...]:
    """From the present turn to the chosen stop, else to the planned turns; empty before a coil has begun."""
    started, estimate = state.started, state.estimate
    if started is None or estimate is None:
        return ()
    stop = state.stop_point
    end = started.planned_turns if stop is None else stop / state.counts_per_turn
    return _fan(estimate, state.turns, end)


def foreseen(prior: Prior, turns: float) -> tuple[Ahead, ...]:
    """The same before anything is wound: from the bare bobbin to `turns`."""
    return _fan(begin(prior), 0.0, turns)


def _fan(estimate: Estimate, here: float, end: float) -> tuple[Ahead, ...]:
    last = max(end, here)
    points = []
    for step in range(FAN_POINTS):
        turn = here + (last - here) * step / (FAN_POINTS - 1)
        finish = finish_at(estimate, turn)
        points.append(Ahead(turn, finish.ohm, (finish.high - finish.low) / 2.0))
    return tuple(points)
