"""How far a coil's own earlier forecasts were off.

Now and then the forecast of the finished coil is put down and compared with the one before. While model and
noise are as stated, the one moves to the other by as much as the variance has shrunk between them, so that
the mean of the squared move over that difference is 1. A coil that drifts by more than was stated, and noise
that lasts longer than a few readings, move it by more. Then everything still to come is doubted by that
factor: what is shown, and how packing and wire wander from there on. (Metrology widens the mean of values
that scatter by more than their uncertainties in the same way: Birge, Physical Review 40, 1932, from memory.)

The gaps grow with the readings so far, so that noise of any duration gets its comparison.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

from windctl.forecast.belief import SHOWN, Belief, moved, walk_of
from windctl.plan.prior import Prior

_FIRST = 20  # readings before the first forecast is put down, and between the next ones at least
_GROWS = 1.35  # from one to the next, as a factor of the readings so far
_AS_STATED = 2.0  # comparisons that the stated figure is worth
_WINDOW = 8.0  # comparisons after which older ones fade
_FROM = 1.2  # less is not told from 1
_MOST = 25.0  # no single comparison counts for more


@dataclass(frozen=True, slots=True)
class Hindsight:
    """`off`: running mean of the squared moves over the expected ones. The forecast put down last is `ohm`,
    as shown, with its `variance`; None where there is none to compare with."""

    off: float = 1.0
    compared: float = 0.0  # up to the window
    due: int = _FIRST  # readings used at which the next forecast is put down
    ohm: float | None = None
    variance: float = 0.0

    @property
    def doubt(self) -> float:
        """By what factor the variance of what is still to come is more than stated; 1 or more."""
        return self.off if self.off > _FROM else 1.0

    def begun_anew(self, used: int) -> Hindsight:
        """After a change on purpose: forecasts from before it cannot be compared with later ones."""
        return replace(self, ohm=None, due=used + _FIRST)


def looked_back(before: Hindsight, belief: Belief, prior: Prior, used: int) -> Hindsight:
    """The comparison that is due after `used` readings, and the next forecast put down."""
    turn = max(prior.turns, belief.turn)
    there = moved(belief, turn, walk_of(prior, before.doubt))
    ohm = there.mean[SHOWN]
    off, compared = before.off, before.compared
    gained = before.variance - there.cov[SHOWN][SHOWN]
    if before.ohm is not None and gained > 0.0:
        compared += 1.0
        off += (min((ohm - before.ohm) ** 2 / gained, _MOST) - off) / (_AS_STATED + compared)
    after = Hindsight(off, min(compared, _WINDOW), max(used + _FIRST, int(_GROWS * used)), ohm)
    if after.doubt != before.doubt:
        there = moved(belief, turn, walk_of(prior, after.doubt))
    return replace(after, variance=there.cov[SHOWN][SHOWN])
