"""Kilo-ohms taken for ohms, or the other way round: the slip that a meter's range display invites."""

from __future__ import annotations

from collections.abc import Sequence
from math import isfinite

from windctl.forecast.belief import first_belief, look, moved, walk_of
from windctl.forecast.readings_file import ReadingLine
from windctl.plan.prior import Prior

_NEAR = 3.0  # a slip by a thousand lands within this factor of what is expected; no wire does that


def thousandfold(prior: Prior, lines: Sequence[ReadingLine]) -> float | None:
    """The factor (1000 or 0.001) that more than half of the readings need to be what this coil can have.

    None where they are all right, or wrong in another way.
    """
    votes = {1000.0: 0, 0.001: 0}
    finite = [line.reading for line in lines if isfinite(line.reading.ohm) and line.reading.ohm > 0.0]
    start, walk = first_belief(prior), walk_of(prior)
    for reading in finite:
        expected = look(moved(start, reading.turn, walk), reading, prior.contact_length_ohm).ohm
        for factor in votes:
            if expected / _NEAR < reading.ohm * factor < expected * _NEAR:
                votes[factor] += 1
    for factor, count in votes.items():
        if 2 * count > len(finite):
            return factor
    return None
