"""Ripple: the pitch swings around its mean by two sine waves that never come together again.

Their periods are a pass times 0.7236 and that times 1.6180 (the golden ratio, the worst of all to approach by
fractions): so no turn-round meets the same swing twice, and the lay does not fall into ribbons.
"""

from __future__ import annotations

import numpy as np

from windctl.lay.draws import ONE, Stream, uniforms
from windctl.lay.fixed import SUB
from windctl.lay.sine import PHASE_BITS, SINE_BITS, sine
from windctl.lay.spec import LaySpec
from windctl.lay.travel import Travel, by_turn

_GOLDEN = 106_039  # of 65536: 1.61803
_PERIOD = 47_423  # of 65536, in passes: 0.72362, (5 + sqrt 5) / 10
_FAST = 19_661  # relative swing of the quicker wave at amount 1, of 65536: 0.3
_SLOW = 13_107  # of the slower one: 0.2


def travel(spec: LaySpec) -> Travel:
    """One pitch a turn: the mean times 1 + amount * (0.3 sin + 0.2 sin), so half to one and a half of it."""
    turns = np.arange(spec.turns, dtype=np.int64)
    fast, slow = _phase_steps(spec)
    start = uniforms(spec.seed, Stream.RIPPLE, 2) * (1 << PHASE_BITS) // ONE
    swing = _FAST * sine(int(start[0]) + fast * turns) + _SLOW * sine(int(start[1]) + slow * turns)
    deviation = (swing >> SINE_BITS) * spec.amount >> 16
    pitches = np.maximum(spec.pitch + (spec.pitch * deviation >> 16), 1)
    return by_turn(spec, pitches, bends=True)


def _phase_steps(spec: LaySpec) -> tuple[int, int]:
    """Phase per turn of the two waves. A wave is never quicker than two turns, or it would not be one."""
    mean_pass = (spec.stroke - spec.spread) * SUB
    fast = min((spec.pitch << PHASE_BITS + 16) // (mean_pass * _PERIOD), 1 << PHASE_BITS - 1)
    return fast, (fast << 16) // _GOLDEN
