"""Where to stop for a resistance, and what a settled reading at rest leaves to do.

Turns can be added, but unwinding is a nuisance. So the stop point lies short of the best guess by the part
of its uncertainty that the settled reading at rest is going to take away; what the meter and the
thermometer have in common with that reading stays, and is not worth stopping short for.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil, floor, sqrt

from windctl.forecast.belief import PER_TURN, SHOWN, answer_covariance, error_of, look, moved
from windctl.forecast.estimator import Estimate
from windctl.forecast.finish import turn_for, turns_between
from windctl.forecast.noise import own_variance
from windctl.forecast.reading import Reading

SHORT_BY = 1.645  # standard deviations; overshoots one time in twenty
_STALE = 0.02  # of the turns still to go: a smaller change of the stop point is not worth sending


@dataclass(frozen=True, slots=True)
class StopAdvice:
    """The stop point for now: `turn` to be sent to the board, and the turn that meets the target as known
    now."""

    turn: int
    target_turn: float
    target_turn_sd: float  # everything included
    short_sd: float  # turns: the part that a settled reading at the stop will take away
    limited: bool  # the least or the most turns decided, not the target


@dataclass(frozen=True, slots=True)
class MissingTurns:
    """Turns still missing at rest, negative to unwind, with their sd, everything included."""

    turns: float
    sd: float


def stop_advice(
    estimate: Estimate,
    count_turn: float,
    target_ohm: float,
    min_turns: float,
    max_turns: float,
    current: int | None = None,
    settles: bool = True,
) -> StopAdvice:
    """The stop point now, a whole turn from `min_turns` to `max_turns` and not behind `count_turn`.

    `current` is the stop point the board has: it stays unless the better one is off by more than a fiftieth
    of the turns to go (and at least one turn). `settles`: a settled reading will be taken at rest, so stop
    a little short.
    """
    wanted = turn_for(estimate, target_ohm)
    short_sd = to_be_learnt(estimate, wanted.turn) if settles else 0.0
    least, most = ceil(max(min_turns, count_turn)), floor(max_turns)
    aim = wanted.turn - SHORT_BY * short_sd
    turn = min(max(floor(aim + 0.5), least), most)
    if current is not None and least <= current <= most:
        band = max(1.0, _STALE * (current - count_turn))
        if abs(turn - current) <= band and turn not in (least, most):
            turn = current
    return StopAdvice(turn, wanted.turn, wanted.sd, short_sd, not least <= aim <= most)


def missing_turns(estimate: Estimate, turn: float, target_ohm: float) -> MissingTurns:
    """After the settled reading at rest: how many turns to add, or with a minus to unwind."""
    belief = moved(estimate.belief, turn, estimate.walk)
    wanted = turn_for(estimate, target_ohm)
    return MissingTurns(turns_between(belief, target_ohm), wanted.sd)


def to_be_learnt(estimate: Estimate, turn: float) -> float:
    """Sd, in turns, of the move that one settled reading at `turn` is going to make."""
    belief = moved(estimate.belief, turn, estimate.walk)
    prior = estimate.prior
    rest = Reading(turn, belief.mean[SHOWN], 20.0, resting=True)
    seen = look(belief, rest, prior.contact_length_ohm)
    move = abs(answer_covariance(belief, seen)) / sqrt(seen.variance + own_variance(prior, rest, seen.ohm))
    return sqrt(belief.doubt) * move * error_of(belief) / max(belief.mean[PER_TURN], 1e-9)
