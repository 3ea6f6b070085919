"""Where the guide turns round, pass after pass."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from windctl.lay.draws import ONE, Stream, uniforms
from windctl.lay.fixed import SUB
from windctl.lay.spec import LaySpec

I64 = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class TurnRounds:
    """places: i64[n + 1], whole steps from the datum, first the start and then each turn-round, far and
    near in turns. at: i64[n + 1], the travel (sub-steps) at which each is reached."""

    places: I64
    at: I64


def turn_rounds(spec: LaySpec, passes: int) -> TurnRounds:
    """The first `passes` turn-rounds. Each lies uniformly within spec.spread inside the stroke's end: a
    spread never brings the guide nearer to a flange than the recipe's margin."""
    inside = np.zeros(passes + 1, dtype=np.int64)
    if spec.spread:
        inside[1:] = uniforms(spec.seed, Stream.REVERSAL, passes) * (spec.spread + 1) // ONE
    far = np.arange(passes + 1) % 2 == 1
    places = np.where(far, spec.stroke - inside, inside)
    at = np.zeros(passes + 1, dtype=np.int64)
    np.cumsum(np.abs(np.diff(places)) * SUB, out=at[1:])
    return TurnRounds(places, at)


def passes_within(spec: LaySpec, travel: int) -> int:
    """At least as many passes as `travel` sub-steps can hold."""
    return travel // ((spec.stroke - 2 * spec.spread) * SUB) + 1
