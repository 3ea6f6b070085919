"""The running estimate of one coil: a belief, and the doubt whether the readings behind it can be believed.

A live contact bounces: some readings show an open circuit, nothing, or a value that is off by a few to
forty per cent. So every reading passes a gate at `GATE` standard deviations of what is expected. A gate
alone can starve: one bad reading let in while little is known shuts out every good one behind it. Therefore

- a reading that is let in while the gate is much wider than the reading's own noise is not yet trusted: the
  belief before it (`anchor`) is kept until later readings agree with it;
- a reading that is kept out starts a rival belief, from the anchor or, with a trusted past or when none has
  agreed for a while, from the present belief with its resistance opened up. Readings that agree with the
  rival feed it. When enough have in a row, it takes over.

Readings that agree with each other and not with the plan leave only what they say (`contradicted.py`).

Open circuits and readings near zero feed nothing; they are counted for the alarm. An estimate has a
constant size.
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from math import isfinite, sqrt

from windctl.forecast.belief import (
    OVER_AIR,
    SHOWN,
    Belief,
    Look,
    Walk,
    first_belief,
    look,
    moved,
    told,
    walk_of,
)
from windctl.forecast.contradicted import contradicted
from windctl.forecast.cooling import cooling_variance, share_left
from windctl.forecast.hindsight import Hindsight, looked_back
from windctl.forecast.noise import Unrest, near, own_variance
from windctl.forecast.reading import Reading
from windctl.forecast.widen import opened
from windctl.plan.prior import Prior

GATE = 4.5  # standard deviations; a good reading falls outside once in 150 000
_UNSURE = 3.0  # expected sd over own noise from which one reading alone is not trusted
_TRUSTED = 2  # readings that agree, the first included
_UNSEATS_TRUSTED = 4  # readings kept out in a row, agreeing among themselves, that unseat a trusted belief
_OPENS_AFTER = 8  # readings kept out in a row after which a rival no longer starts from the prior
_OPEN_FACTOR = 5.0  # beyond this multiple of what is expected: an open circuit
_ZERO_PART = 0.1  # below this part of what is expected: no coil between the probes
_ZERO_FROM_OHM = 20.0  # a coil too short to tell from nothing


@dataclass(frozen=True, slots=True)
class Surprise:
    """A reading, or a run of them, far from what was expected."""

    turn: float
    expected_ohm: float
    seen_ohm: float


@dataclass(frozen=True, slots=True)
class Estimate:
    """All that is kept of a coil's readings. Made by `begin`; every change makes another one."""

    prior: Prior
    walk: Walk
    belief: Belief
    reference: Belief  # what was expected without any reading, since the start or the last event
    unrest: Unrest = field(default_factory=Unrest)
    anchor: Belief | None = None  # before the reading that is not trusted yet
    trust: int = 0  # readings in agreement since the anchor, or since nothing was known
    rival: Belief | None = None
    rival_trust: int = 0
    used: int = 0
    gated: int = 0
    kept_out: int = 0  # in a row, open circuits and readings near zero not counted
    open_run: int = 0  # open circuits since the last other reading
    zero_run: int = 0
    jump: Surprise | None = None  # the last time that a rival took over from a trusted belief
    doubt: Surprise | None = None  # a reading at rest that was kept out, until another one is used
    seconds: float | None = None  # when the last reading was taken
    share: float = 1.0  # of a winding coil's warmth left then
    hindsight: Hindsight = field(default_factory=Hindsight)

    @property
    def turn(self) -> float:
        """The turn up to which readings have been taken in."""
        return self.belief.turn


def begin(prior: Prior) -> Estimate:
    """The estimate before the first turn."""
    belief = first_belief(prior)
    return Estimate(prior, walk_of(prior), belief, belief)


def update(estimate: Estimate, reading: Reading) -> tuple[Estimate, bool]:
    """Take in one reading; False when it was gated out.

    Readings are handed in as they come, or in `canonical_key` order; going back to an earlier turn is
    allowed.
    """
    prior = estimate.prior
    share = _share_left(estimate, reading)
    belief = moved(estimate.belief, reading.turn, estimate.walk)
    seen = look(belief, reading, prior.contact_length_ohm, share)
    if not isfinite(reading.ohm) or reading.ohm > _OPEN_FACTOR * max(seen.ohm, _ZERO_FROM_OHM):
        return replace(estimate, gated=estimate.gated + 1, open_run=estimate.open_run + 1, zero_run=0), False
    if seen.ohm > _ZERO_FROM_OHM and reading.ohm < _ZERO_PART * seen.ohm:
        return replace(estimate, gated=estimate.gated + 1, zero_run=estimate.zero_run + 1, open_run=0), False
    stated = _stated_variance(belief, seen, reading, prior, share)
    unrest = estimate.unrest
    surprise = reading.ohm - seen.ohm
    if abs(surprise) > GATE * sqrt(seen.variance + stated * unrest.spread_factor()):
        return _kept_out(estimate, reading, seen.ohm, share)
    close = near(reading, estimate.belief.turn)
    noise = stated * unrest.weight_factor(close)
    unsure = estimate.trust == 0 or seen.variance > _UNSURE * _UNSURE * stated
    trust = 1 if unsure else estimate.trust + 1
    anchor = estimate.belief if unsure else estimate.anchor
    after = _with(
        estimate,
        unrest.heard(surprise, seen.variance + stated, close),
        told(belief, seen, reading.ohm, noise),
        anchor=anchor if trust < _TRUSTED else None,
        trust=trust,
        used=1,
        seconds=reading.seconds,
        share=share,
    )
    if reading.resting or after.hindsight.due != estimate.hindsight.due:  # often enough, and cheap
        after = _held_to_the_readings(after)
    return after, True


def _held_to_the_readings(estimate: Estimate) -> Estimate:
    """The estimate, without its plan where that and the readings cannot both be right."""
    instead = contradicted(estimate.belief, estimate.reference, estimate.walk)
    if instead is None:
        return estimate
    hindsight = estimate.hindsight.begun_anew(estimate.used)
    return replace(
        estimate, belief=replace(instead, doubt=estimate.belief.doubt), anchor=None, hindsight=hindsight
    )


def _share_left(estimate: Estimate, reading: Reading) -> float:
    """How warm the coil still is; without times, as warm as it was. It cools where the spindle has stood."""
    if reading.seconds is None or estimate.seconds is None:
        return estimate.share
    standing = reading.resting and reading.turn == estimate.turn
    return share_left(estimate.share, reading.seconds - estimate.seconds, standing)


def _stated_variance(belief: Belief, seen: Look, reading: Reading, prior: Prior, share: float) -> float:
    """Variance of a reading on its own, as far as can be stated before it is taken."""
    variance = own_variance(prior, reading, seen.ohm)
    if share < 1.0:
        square = belief.mean[OVER_AIR] ** 2 + belief.cov[OVER_AIR][OVER_AIR]
        variance += cooling_variance(belief.mean[SHOWN], square, share)
    return variance


def _kept_out(
    estimate: Estimate, reading: Reading, expected_ohm: float, share: float
) -> tuple[Estimate, bool]:
    """A reading outside the gate: it feeds the rival, which takes over once enough readings agree with it."""
    surprise = Surprise(reading.turn, expected_ohm, reading.ohm)
    rival, agreeing = None, 1
    if estimate.rival is not None:
        rival = _taken(estimate, estimate.rival, reading, share, gated=True)
        agreeing += estimate.rival_trust
    if rival is None:
        rival, agreeing = _taken(estimate, _rivals_start(estimate), reading, share, gated=False), 1
    trusted = estimate.trust >= _TRUSTED
    if rival is None or agreeing < (_UNSEATS_TRUSTED if trusted else _TRUSTED):
        return _with(
            estimate,
            estimate.unrest,
            estimate.belief,
            anchor=estimate.anchor,
            trust=estimate.trust,
            rival=rival,
            rival_trust=agreeing,
            doubt=surprise if reading.resting else estimate.doubt,
            seconds=reading.seconds,
            share=share,
        ), False
    taken_over = _with(
        estimate, estimate.unrest, rival, trust=agreeing, used=1, seconds=reading.seconds, share=share
    )
    taken_over = replace(taken_over, hindsight=estimate.hindsight.begun_anew(taken_over.used))
    return replace(taken_over, jump=surprise) if trusted else taken_over, True


def _rivals_start(estimate: Estimate) -> Belief:
    """The belief that a reading kept out is to be believed from."""
    if estimate.trust >= _TRUSTED or estimate.kept_out >= _OPENS_AFTER:
        return opened(estimate.belief, estimate.prior)
    return estimate.anchor or estimate.belief


def _taken(
    estimate: Estimate, start: Belief, reading: Reading, share: float, *, gated: bool
) -> Belief | None:
    """A rival after a reading: None where it is `gated` and does not agree; else taken at its word."""
    prior = estimate.prior
    belief = moved(start, reading.turn, estimate.walk)
    seen = look(belief, reading, prior.contact_length_ohm, share)
    stated = _stated_variance(belief, seen, reading, prior, share)
    spread = seen.variance + stated * estimate.unrest.spread_factor()
    if gated and abs(reading.ohm - seen.ohm) > GATE * sqrt(spread):
        return None
    noise = stated * estimate.unrest.weight_factor(near(reading, start.turn))
    return told(belief, seen, reading.ohm, noise)


def _with(
    estimate: Estimate,
    unrest: Unrest,
    belief: Belief,
    *,
    anchor: Belief | None = None,
    trust: int,
    rival: Belief | None = None,
    rival_trust: int = 0,
    used: int = 0,
    doubt: Surprise | None = None,
    seconds: float | None,
    share: float,
) -> Estimate:
    """The next estimate; `dataclasses.replace` would cost as much as the update itself."""
    walk, hindsight = estimate.walk, estimate.hindsight
    if estimate.used + used >= hindsight.due:
        hindsight = looked_back(hindsight, belief, estimate.prior, estimate.used + used)
    if hindsight.doubt != belief.doubt:
        belief = replace(belief, doubt=hindsight.doubt)
        walk = walk_of(estimate.prior, hindsight.doubt)
    return Estimate(
        estimate.prior,
        walk,
        belief,
        estimate.reference,
        unrest,
        anchor,
        trust,
        rival,
        rival_trust,
        estimate.used + used,
        estimate.gated + 1 - used,
        0 if used else estimate.kept_out + 1,
        0,
        0,
        estimate.jump,
        doubt,
        estimate.seconds if seconds is None else seconds,
        share,
        hindsight,
    )
