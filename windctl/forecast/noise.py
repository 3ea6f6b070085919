"""How much one reading is worth: the profile's figures, and what the readings themselves show of their noise.

Two running figures watch the readings, in a form that outliers cannot pull: the median of |surprise| /
expected sd, and how often one surprise has the sign of the one before. Louder or more alike than white
noise of the stated size makes every later reading count for less. Quieter changes nothing: the profile's
figure is the floor.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import exp, pi, sin

from windctl.forecast.reading import Reading
from windctl.plan.prior import Prior

TURNING_NOISE = (
    2.0  # a turning coil is noisier than a resting one: hum and its own small voltage are averaged, not gone
)
SMALLEST_SD_OHM = 1e-6
_MEDIAN_OF_NORMAL = 0.6744897501960817  # median of |z| of a standard normal
_LEARN = 0.02  # weight of one reading in the two running figures; the first few weigh more
_FIRST_FEW = 10
_LOUDEST = 4.0  # exp(4) = 55 times the stated noise, beyond which it is no reading any more
_ALIKE_FROM = 0.2  # twice the sd of the running sign figure of white noise
_ALIKE_MOST = 0.8


@dataclass(frozen=True, slots=True)
class Unrest:
    """What the readings so far show of their noise beyond the profile's figure."""

    loudness: float = 0.0  # log of the median surprise over the one expected, at least 0
    alike: float = 0.0  # running mean of sign(surprise) * sign(the one before)
    last_sign: float = 0.0
    readings: int = 0  # counted until they weigh no more than `_LEARN` each

    def factor(self, turning: bool) -> float:
        """By how much the variance of a reading's noise is to be multiplied, 1 or more."""
        loud = exp(2.0 * self.loudness)
        if not turning or self.alike <= _ALIKE_FROM:
            return loud
        rho = sin(
            0.5 * pi * min(self.alike, _ALIKE_MOST)
        )  # of a Gaussian pair, from how often the signs agree
        return loud * (1.0 + rho) / (1.0 - rho)

    def heard(self, surprise: float, sd: float) -> Unrest:
        """The figures after one more usable reading that came out `surprise` ohm off, with `sd` expected."""
        learn, readings = _LEARN, self.readings
        if readings * _LEARN < 1.0:
            learn, readings = 1.0 / (_FIRST_FEW + readings), readings + 1
        up = abs(surprise) > _MEDIAN_OF_NORMAL * sd
        loudness = self.loudness + (learn if up else -learn)
        sign = 1.0 if surprise > 0.0 else -1.0
        alike = self.alike + learn * (sign * self.last_sign - self.alike)
        return Unrest(min(max(loudness, 0.0), _LOUDEST), alike, sign, readings)


def own_variance(prior: Prior, reading: Reading, expected_ohm: float) -> float:
    """Variance of a reading's own noise in ohm^2: its stated sd if it has one, else the meter's.

    Taken at the expected resistance, not at the one read, or low readings would count for more than high
    ones.
    """
    if reading.sd_ohm is not None:
        return max(reading.sd_ohm, SMALLEST_SD_OHM) ** 2
    relative = prior.noise_rel if reading.resting else TURNING_NOISE * prior.noise_rel
    return max((relative * expected_ohm) ** 2 + prior.floor_ohm**2, SMALLEST_SD_OHM**2)
