"""What happens to a coil between readings: splices, new wire, a corrected count. Each widens what it must."""

from __future__ import annotations

from dataclasses import replace

from windctl.forecast.belief import PER_TURN, Belief, moved
from windctl.forecast.estimator import Estimate
from windctl.forecast.widen import (
    SPLICE_REL,
    SPLICE_TURNS_SD,
    with_new_wire,
    with_resistance_variance,
    with_wire_variance,
)


def spliced(estimate: Estimate, turn: float) -> Estimate:
    """A break was joined at `turn`: the same spool goes on, a turn may be lost, the end was pulled on."""
    belief = _lost_turns(moved(estimate.belief, turn, estimate.walk), SPLICE_TURNS_SD)
    return _anew(estimate, with_wire_variance(belief, SPLICE_REL**2))


def new_wire(estimate: Estimate, turn: float) -> Estimate:
    """From `turn` on another spool of the recipe's wire is wound, joined by a splice."""
    belief = _lost_turns(moved(estimate.belief, turn, estimate.walk), SPLICE_TURNS_SD)
    expected = moved(estimate.reference, turn, estimate.walk)
    return _anew(estimate, with_new_wire(belief, expected, estimate.prior))


def recounted(estimate: Estimate, turn: float, corrected: float, sd_turns: float) -> Estimate:
    """What was counted as `turn` was really turn `corrected`, give or take `sd_turns`.

    Readings so far were taken at the wrong count, so the resistance is right and only its turn changes; how
    the turns before were spread stays as it is.
    """
    belief = _lost_turns(moved(estimate.belief, turn, estimate.walk), sd_turns)
    return _anew(estimate, replace(belief, turn=corrected))


def _lost_turns(belief: Belief, sd_turns: float) -> Belief:
    return with_resistance_variance(belief, (sd_turns * belief.mean[PER_TURN]) ** 2)


def _anew(estimate: Estimate, belief: Belief) -> Estimate:
    """The estimate with its belief changed on purpose: rivals from before the event mean nothing any more."""
    return replace(
        estimate,
        belief=belief,
        reference=belief,
        anchor=None,
        trust=max(estimate.trust, 1) if estimate.used else 0,
        rival=None,
        rival_trust=0,
        doubt=None,
        open_run=0,
        zero_run=0,
        hindsight=estimate.hindsight.begun_anew(estimate.used),
    )
