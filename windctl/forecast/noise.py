"""How much one reading is worth: the profile's figures, and what the readings themselves show of their noise.

Two running figures watch the readings that pass the gate: their mean squared surprise over the one expected,
and how often one surprise has the sign of the one before. Both move within a known band while the noise is
white and of the stated size. Beyond that band every later reading counts for less. Quieter readings change
nothing: the profile's figure is the floor.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import pi, sin

from windctl.forecast.reading import Reading
from windctl.plan.prior import Prior

TURNING_NOISE = 2.0  # over a resting reading's: hum and the turning coil's own voltage are averaged, not gone
SMALLEST_SD_OHM = 1e-6
_AS_STATED = 20.0  # readings that the profile's figure is worth
_ALIKE_AT_FIRST = 0.4  # a contact that follows a wire is not taken for white before it has shown it
_AS_AT_FIRST = 20.0  # readings that this is worth
_NEAR_TURNS = 60.0  # some seconds; what wanders more slowly is the coil
_WINDOW = 80.0  # readings after which older ones fade
_QUIET_BELOW, _LOUD_FROM = 0.5, 1.5  # three sd around 1 of the mean of squares of few white readings
_ALIKE_FROM = 0.2  # three sd above 0 of the running sign figure of white noise
_ALIKE_MOST = 0.7  # rho 0.89: a factor of 17


@dataclass(frozen=True, slots=True)
class Unrest:
    """What the readings so far show of their noise beyond the profile's figure."""

    loud: float = 1.0  # running mean of squared surprise over its expected variance
    alike: float = _ALIKE_AT_FIRST  # running mean of sign(surprise) * sign(the one before)
    last_sign: float = 0.0
    readings: float = 0.0  # counted up to the window

    def spread_factor(self) -> float:
        """By how much the variance of one reading's noise is to be multiplied, 1 or more."""
        return self.loud if self.loud > _LOUD_FROM else 1.0

    def weight_factor(self, near: bool) -> float:
        """The same for what a reading teaches: `near` ones that share their noise with the next teach less.

        (1 + rho)/(1 - rho) is the variance of a mean of many such readings over that of as many
        independent ones. Readings much quieter than stated may share a good deal before that matters.
        """
        if not near or self.alike <= _ALIKE_FROM:
            return self.spread_factor()
        rho = sin(0.5 * pi * min(self.alike, _ALIKE_MOST))  # of a Gaussian pair, from how often signs agree
        loud = 1.0 if _QUIET_BELOW < self.loud < _LOUD_FROM else self.loud
        return max(loud * (1.0 + rho) / (1.0 - rho), 1.0)

    def heard(self, surprise: float, variance: float, near: bool) -> Unrest:
        """The figures after one more reading let in, `surprise` ohm off where `variance` was stated."""
        readings = self.readings + 1.0
        sign = 1.0 if surprise > 0.0 else -1.0
        alike = self.alike
        if near and self.last_sign != 0.0:
            alike += (sign * self.last_sign - alike) / (_AS_AT_FIRST + readings)
        loud = self.loud + (surprise * surprise / variance - self.loud) / (_AS_STATED + readings)
        return Unrest(loud, alike, sign, min(readings, _WINDOW))


def near(reading: Reading, last_turn: float) -> bool:
    """Whether a reading can share its noise with the last one: both turning, seconds apart."""
    return not reading.resting and abs(reading.turn - last_turn) <= _NEAR_TURNS


def own_variance(prior: Prior, reading: Reading, expected_ohm: float) -> float:
    """Variance of a reading's own noise in ohm^2: its stated sd if it has one, else the meter's.

    Taken at the expected resistance, not at the one read, or low readings would count for more than high
    ones.
    """
    if reading.sd_ohm is not None:
        return max(reading.sd_ohm, SMALLEST_SD_OHM) ** 2
    relative = prior.noise_rel if reading.resting else TURNING_NOISE * prior.noise_rel
    return max((relative * expected_ohm) ** 2 + prior.floor_ohm**2, SMALLEST_SD_OHM**2)
