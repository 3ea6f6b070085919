"""What it would gain to let a coil cool and read it again, and what it will read then.

A coil comes off the machine warmer than the air, by how much nobody knows exactly, and cools in minutes. Once
little of that warmth is left, it is no longer part of what a reading is unsure of.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil, log

from windctl.forecast.belief import OVER_AIR, SHOWN, look, moved, resistance, told
from windctl.forecast.cooling import COOLING_S, cooling_variance, share_left
from windctl.forecast.estimator import Estimate
from windctl.forecast.finish import Z95
from windctl.forecast.noise import own_variance
from windctl.forecast.reading import Reading

COOL = 0.05  # share of the warmth that no longer matters


@dataclass(frozen=True, slots=True)
class Waiting:
    """Read again after `minutes`: at the coil's ends the meter should then show `ohm`, leads and all, if the
    thermometer still shows `celsius`. The half-widths are of the resistance at 20 degrees C, now and then."""

    minutes: int
    ohm: float
    celsius: float
    now_u95: float
    then_u95: float

    def as_json(self) -> dict[str, float]:
        """The same as other programs read it."""
        return {
            "minutes": self.minutes,
            "ohm": self.ohm,
            "celsius": self.celsius,
            "now_u95_ohm": self.now_u95,
            "then_u95_ohm": self.then_u95,
        }


def waiting(estimate: Estimate, turn: float, celsius: float) -> Waiting | None:
    """For a coil that stands at `turn` and was read at rest; None where it has cooled already."""
    share = estimate.share
    if estimate.used == 0 or share <= COOL:
        return None
    seconds = COOLING_S * log(share / COOL)
    then = share_left(share, seconds, standing=True)
    belief = moved(estimate.belief, turn, estimate.walk)
    again = Reading(turn, belief.mean[SHOWN], celsius, resting=True)
    seen = look(belief, again, 0.0, then)
    square = belief.mean[OVER_AIR] ** 2 + belief.cov[OVER_AIR][OVER_AIR]
    noise = own_variance(estimate.prior, again, seen.ohm) + cooling_variance(belief.mean[SHOWN], square, then)
    cold = told(belief, seen, seen.ohm, noise)
    now_sd, then_sd = resistance(belief)[1], resistance(cold)[1]
    return Waiting(ceil(seconds / 60.0), seen.ohm, celsius, Z95 * now_sd, Z95 * then_sd)
