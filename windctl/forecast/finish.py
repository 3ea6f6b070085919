"""What an estimate says of any turn: resistance at 20 degrees C, and the turn that meets a resistance.

The interval is about the coil's true resistance. Whatever the meter, the thermometer and the coil's warmth
may be off by is a state of the estimate, so the spread of the resistance already carries it.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import sqrt

from windctl.forecast.belief import PER_TURN, Belief, error_of, moved, resistance
from windctl.forecast.estimator import Estimate

Z95 = 1.959963984540054  # standard normal, two-sided 95 %
_FLATTEST = 0.25  # of the present ohm per turn; a coil never grows more slowly than this


@dataclass(frozen=True, slots=True)
class Finish:
    """Resistance at 20 degrees C after some turn, in ohm, with its 95 % interval, everything included."""

    ohm: float
    sd: float
    low: float
    high: float


@dataclass(frozen=True, slots=True)
class TurnFor:
    """The turn after which the coil has a given resistance, with its 95 % interval, everything included."""

    turn: float
    sd: float
    low: float
    high: float


def finish_at(estimate: Estimate, turn: float) -> Finish:
    """What the coil will have once (or had when) `turn` turns are wound."""
    ohm, sd = resistance(moved(estimate.belief, turn, estimate.walk))
    return Finish(ohm, sd, ohm - Z95 * sd, ohm + Z95 * sd)


def so_far(estimate: Estimate, turn: float) -> Finish:
    """What the coil has now, with the count at `turn`."""
    return finish_at(estimate, turn)


def turn_for(estimate: Estimate, ohm: float) -> TurnFor:
    """The turn that gives `ohm` at 20 degrees C."""
    belief = estimate.belief
    turn = max(belief.turn + turns_between(belief, ohm), 0.0)
    there = moved(belief, turn, estimate.walk)
    slope = max(there.mean[PER_TURN], _FLATTEST * estimate.prior.ohm_per_turn)
    sd = resistance(there)[1] * error_of(there) / slope
    return TurnFor(turn, sd, turn - Z95 * sd, turn + Z95 * sd)


def turns_between(belief: Belief, ohm: float) -> float:
    """Turns from the belief's own turn to a resistance: R + r*n + g*n*n/2 = ohm; negative to go back."""
    shown, per_turn, growth = belief.mean[:3]
    missing = ohm * error_of(belief) - shown
    slope_there = sqrt(max(per_turn * per_turn + 2.0 * growth * missing, (_FLATTEST * per_turn) ** 2))
    return 2.0 * missing / (abs(per_turn) + slope_there)
