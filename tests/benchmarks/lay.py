"""How fast programs are made, and that it grows no faster than the turns."""

from __future__ import annotations

import time

from windctl.lay.fixed import SUB
from windctl.lay.make import program_of
from windctl.lay.patterns import PATTERNS
from windctl.lay.spec import LaySpec

STEPS_PER_MM = 200.0
REPEATS = 5


def run() -> None:
    """Print turns per second for each pattern, from 8 000 to 800 000 turns: the best of a few runs."""
    for pattern in PATTERNS:
        for turns in (8_000, 80_000, 800_000):
            spec = LaySpec(
                pattern, turns, 400, 2160, 51 * SUB, amount=32768, seed=1, backlash=10, take_up=400
            )
            best = min(_seconds(spec) for _ in range(REPEATS))
            print(f"lay {pattern:8} {turns:7} turns  {turns / best / 1e6:6.2f} million turns/s")


def _seconds(spec: LaySpec) -> float:
    start = time.perf_counter()
    program_of(spec, STEPS_PER_MM).packed()
    return time.perf_counter() - start


if __name__ == "__main__":
    run()
