"""Where to stop for a check of the resistance, whether it is worth it, and what it gains.

A bared spot inside a coil is a wound, so there are as few checks as will do. The first stop on the way to a
resistance lies where the coil may just meet its target: from there the fewest turns are left to forecast. At
the end of a coil the wire is bared anyway, so the last reading costs nothing.
"""

from __future__ import annotations

from dataclasses import dataclass

from windctl.forecast.belief import PER_TURN, SHOWN, error_of, look, moved, resistance, told
from windctl.forecast.estimator import Estimate
from windctl.forecast.finish import Z95
from windctl.forecast.noise import own_variance
from windctl.forecast.reading import Reading
from windctl.forecast.stop import stop_advice, to_be_learnt

MOST_CHECKS = 2  # inside a coil
WORTH = 0.25  # of the tolerance: where a reading would change the finish by less, it is not worth a wound


@dataclass(frozen=True, slots=True)
class Check:
    """A check at `turn`. The standard deviations, in ohm at 20 degrees C, are of the resistance after
    `of_turn` turns, without it and with it."""

    turn: float
    of_turn: float
    without_ohm: float
    with_ohm: float

    def as_json(self) -> dict[str, float]:
        """The check as other programs read it; half-widths of 95 % intervals."""
        return {
            "turn": self.turn,
            "of_turn": self.of_turn,
            "without_u95_ohm": Z95 * self.without_ohm,
            "with_u95_ohm": Z95 * self.with_ohm,
        }


def where_to_check(
    estimate: Estimate, count_turn: float, target_ohm: float, min_turns: float, max_turns: float
) -> Check:
    """Where the next stop on the way to a resistance lies, and what a reading there would gain."""
    advice = stop_advice(estimate, count_turn, target_ohm, min_turns, max_turns)
    of_turn = min(max(advice.target_turn, min_turns), max_turns)
    return check_at(estimate, float(advice.turn), max(of_turn, float(advice.turn)))


def check_at(estimate: Estimate, turn: float, of_turn: float) -> Check:
    """What one settled reading at `turn` would gain for the resistance after `of_turn` turns."""
    without = resistance(moved(estimate.belief, of_turn, estimate.walk))[1]
    there = moved(estimate.belief, turn, estimate.walk)
    rest = Reading(turn, there.mean[SHOWN], 20.0, resting=True)
    seen = look(there, rest, estimate.prior.contact_length_ohm, estimate.share)
    read = told(there, seen, seen.ohm, own_variance(estimate.prior, rest, seen.ohm))
    return Check(turn, of_turn, without, resistance(moved(read, of_turn, estimate.walk))[1])


def worth_checking(estimate: Estimate, turn: float, target_ohm: float, tolerance_pct: float) -> bool:
    """Whether a reading at `turn` may change what is known by more than a part of the tolerance."""
    there = moved(estimate.belief, turn, estimate.walk)
    ohm = to_be_learnt(estimate, turn) * there.mean[PER_TURN] / error_of(there)
    return ohm > WORTH * tolerance_pct / 100.0 * target_ohm
