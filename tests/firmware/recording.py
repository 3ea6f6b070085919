"""The trace that the twin test and the mutants are held to."""

from __future__ import annotations

from dataclasses import dataclass

from tests.firmware.plays import LENGTHY, SHORT
from tests.firmware.trace import Trace
from tests.firmware.wild import Reached, wild_ticks

SEED = 20_000
TICKS = 200_000  # random ones; the plays come besides


@dataclass(frozen=True)
class Recorded:
    """What was recorded, and what of the board it reached."""

    trace: Trace
    reached: Reached


def record() -> Recorded:
    """Plays by hand and random ticks, as many as CI takes."""
    trace, reached = Trace(), Reached()
    for play in SHORT:
        play(trace)
    wild_ticks(SEED, TICKS, trace, reached)
    for play in LENGTHY:
        play(trace)
    return Recorded(trace, reached)
