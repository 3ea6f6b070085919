"""Scores of the forecast over many drawn coils, stage by stage in one pass through each coil's readings."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from math import log, sqrt

import numpy as np
from numpy.typing import NDArray

from tests.forecast.rivals import Filterpy, parabola, proportional
from tests.forecast.truth import FINE, TURNS, Coil, Instruments, Truth, draw, prior_for
from windctl.forecast.belief import first_belief, look, moved, told, walk_of
from windctl.forecast.estimator import begin, update
from windctl.forecast.finish import finish_at
from windctl.forecast.noise import own_variance
from windctl.plan.prior import Prior

Floats = NDArray[np.float64]


@dataclass(frozen=True)
class Score:
    """Relative errors of the finished resistance and the half-widths given with them, per coil."""

    errors: Floats
    halves: Floats

    @property
    def rms(self) -> float:
        return rms(self.errors)

    @property
    def rms_se(self) -> float:
        """Standard error of the rms, from the errors' own spread."""
        squares = self.errors**2
        return float(squares.std(ddof=1) / sqrt(len(squares)) / (2.0 * self.rms))

    @property
    def held(self) -> float:
        return float(np.mean(np.abs(self.errors) <= self.halves))

    @property
    def sharp(self) -> float:
        """Median half-width over the rms."""
        return float(np.median(self.halves) / self.rms)


def rms(errors: Sequence[float] | Floats) -> float:
    return float(np.sqrt(np.mean(np.square(errors)))) if len(errors) else float("nan")


@dataclass
class Seen:
    """What was seen of a row of coils: a score per stage, the same for other ways, readings kept out."""

    stages: list[Score]
    rivals: dict[str, list[list[float]]] = field(default_factory=dict)
    read: int = 0
    gated: int = 0


def follow(
    seeds: Iterable[int],
    truth: Truth,
    meter: Instruments,
    turns: Floats,
    stages: Sequence[float],
    *,
    resting: bool = False,
    cold: bool = False,
    prior: Prior | None = None,
    rivals: Sequence[str] = (),
) -> Seen:
    """The forecast after the readings up to each of `stages` (turns, ascending); no reading, no stage: [0].

    `prior`: what is believed of the coils; else what is true of them.
    """
    prior = prior_for(truth, meter) if prior is None else prior
    errors: list[list[float]] = [[] for _ in stages]
    halves: list[list[float]] = [[] for _ in stages]
    others: dict[str, list[list[float]]] = {name: [[] for _ in stages] for name in rivals}
    seen = Seen([], others)
    for seed in seeds:
        coil = draw(seed, truth, meter)
        true = float(coil.ohm[TURNS])
        readings = coil.readings(turns, resting=resting, cold=cold)
        estimate, at = begin(prior), 0
        theirs = Filterpy(prior) if "filterpy" in rivals else None
        for place, stage in enumerate(stages):
            while at < len(readings) and readings[at].turn <= stage:
                estimate, used = update(estimate, readings[at])
                if theirs is not None:
                    theirs.take(readings[at])
                seen.read, seen.gated, at = seen.read + 1, seen.gated + (not used), at + 1
            finish = finish_at(estimate, TURNS)
            errors[place].append(finish.ohm / true - 1.0)
            halves[place].append((finish.high - finish.ohm) / true)
            if "rule" in others:
                others["rule"][place].append(proportional(prior, readings[:at], TURNS) / true - 1.0)
            if "parabola" in others:
                others["parabola"][place].append(parabola(prior, readings[:at], TURNS) / true - 1.0)
            if theirs is not None:
                others["filterpy"][place].append(theirs.finish(TURNS)[0] / true - 1.0)
    seen.stages = [Score(np.array(a), np.array(b)) for a, b in zip(errors, halves, strict=True)]
    return seen


def told_apart(
    seeds: Iterable[int], truth: Truth, wider: Prior, turns: Floats, stages: Sequence[float]
) -> list[float]:
    """By how much the readings up to each stage favour the prior `wider` over the usual one: the median over
    coils of the logarithm of the likelihood ratio. Below 1 nobody can tell the two apart."""
    found = []
    for seed in seeds:
        coil = draw(seed, truth, FINE)
        found.append(
            _likelihood(coil, wider, turns, stages)
            - _likelihood(coil, prior_for(Truth(), FINE), turns, stages)
        )
    return [float(x) for x in np.median(np.array(found), axis=0)]


def _likelihood(coil: Coil, prior: Prior, turns: Floats, stages: Sequence[float]) -> Floats:
    """Logarithm of the likelihood of the readings up to each stage."""
    belief, walk, total, at = first_belief(prior), walk_of(prior), 0.0, []
    coil = Coil(
        coil.ohm, coil.wire, np.random.default_rng(1), coil.meter, coil.gain, coil.bias, coil.over, coil.lead
    )
    for reading in coil.readings(turns):
        belief = moved(belief, reading.turn, walk)
        seen = look(belief, reading, prior.contact_length_ohm)
        noise = own_variance(prior, reading, seen.ohm)
        total -= 0.5 * ((reading.ohm - seen.ohm) ** 2 / (seen.variance + noise) + log(seen.variance + noise))
        belief = told(belief, seen, reading.ohm, noise)
        if reading.turn in stages:
            at.append(total)
    return np.array(at)
