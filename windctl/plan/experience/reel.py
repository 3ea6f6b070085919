"""How much wire is still on a spool, and for how many coils."""

from __future__ import annotations

from dataclasses import dataclass
from math import erf, exp, floor, hypot, sqrt

from windctl.plan.experience.fold import Experience
from windctl.plan.experience.spool import Spool
from windctl.plan.experience.supply import Left
from windctl.plan.experience.unknowns import METAL_REL

_LENGTH_REL = 0.01  # of the wire on a wound coil, as planned. Our judgement
_COAT_PART = 0.01  # of the mass that the enamel's thickness may change. Our judgement


@dataclass(frozen=True, slots=True)
class Weighing:
    """Wire on the spool, g, and the metres that coils have taken from it since."""

    grams: float
    sd: float
    since_m: float


def left_on(spool: Spool, experience: Experience, weighing: Weighing) -> Left:
    """What was weighed, less what was wound since. Ohm per metre, where learnt, tells the mass per metre."""
    wire, level = spool.wire(), experience.of(("level", spool.id))
    off = 0.0 if level is None else level.mean
    level_sd = wire.ohm_per_m_sd / wire.ohm_per_m if level is None else level.sd
    g_per_m = wire.mass_g_per_m * exp(-off)
    metres = weighing.grams / g_per_m
    rel = hypot(level_sd, METAL_REL, _COAT_PART, weighing.sd / max(weighing.grams, 1e-9))
    return Left(metres - weighing.since_m, hypot(metres * rel, weighing.since_m * _LENGTH_REL))


def runs_out(left: Left, metres: float) -> float:
    """How probable it is that so much wire is not left: 0 to 1."""
    if left.sd <= 0.0:
        return 1.0 if metres > left.metres else 0.0
    return 0.5 * (1.0 + erf((metres - left.metres) / (left.sd * sqrt(2.0))))


def coils_left(left: Left, metres_each: float) -> int:
    """How many coils of so much wire are left, so that the last one is finished 19 times in 20."""
    return max(floor((left.metres - 1.645 * left.sd) / metres_each), 0)
