"""Stagger: every pass has a pitch and a starting offset of its own.

A pass takes its share of turns times a factor of its own, and before it the guide stands for a part of a
turn of its own, so that it starts at another angle of the bobbin than the passes before.
"""

from __future__ import annotations

import numpy as np

from windctl.lay.draws import ONE, Stream, uniforms
from windctl.lay.fixed import SUB
from windctl.lay.spec import LaySpec
from windctl.lay.travel import Travel
from windctl.lay.turn_rounds import turn_rounds

_PITCH = 19_661  # relative half range of a pass's turns at amount 1, of 65536: 0.3
_SHORTEST_PASS = 8  # the guide stands for at most so small a part of a pass


def travel(spec: LaySpec) -> Travel:
    """A straight line for each pass, and one that stands still before it.

    The mean pass takes its share of turns, the standing included, so that the mean pitch is the recipe's.
    """
    counts = spec.counts_per_turn
    passes = 2 + spec.total_counts // max(1, _least_pass_counts(spec))
    rounds = turn_rounds(spec, passes)
    lengths = np.diff(rounds.at)
    share = spec.amount * (2 * uniforms(spec.seed, Stream.STAGGER, passes) - ONE) >> 16
    whole = lengths // SUB * (counts * SUB) // spec.pitch
    most = min(counts, int(whole.min()) // _SHORTEST_PASS) * spec.amount >> 16
    stands = uniforms(spec.seed, Stream.STAGGER, passes, word=1) * (most + 1) // ONE
    stands[0] = 0
    moves = np.maximum(whole + (whole * (share * _PITCH >> 16) >> 16) - most // 2, 1)
    at = np.zeros(2 * passes + 1, dtype=np.int64)
    at[1::2], at[2::2] = stands, moves
    gone = np.zeros(2 * passes + 1, dtype=np.int64)
    gone[1::2], gone[2::2] = 0, lengths
    at, gone = np.cumsum(at), np.cumsum(gone)
    kept = np.concatenate([[True], np.diff(at) > 0])
    return Travel(at[kept], gone[kept], bends=True)


def _least_pass_counts(spec: LaySpec) -> int:
    """Fewer counts than any pass takes."""
    shortest = (spec.stroke - 2 * spec.spread) * spec.counts_per_turn * SUB // spec.pitch
    return shortest * (65536 - _PITCH) // 65536 - shortest // (2 * _SHORTEST_PASS) - 2
