"""What a plan costs against its number of turns: ten times the turns are to cost about ten times as much."""

from __future__ import annotations

import math
import time

from tests.lay.recipes import EVEN, WANDER, recipe
from windctl.plan.make import make_plan
from windctl.profile.builtin import VIRTUAL

TURNS = (1_000, 10_000, 100_000, 1_000_000)
REPEATS = 3


def seconds(pattern: str, turns: int) -> float:
    """The least of several plans, recipe and all."""
    base = EVEN if pattern == "even" else WANDER | {"lay.pattern": f'"{pattern}"'}
    asked = recipe(base, stop__turns=str(turns))
    best = math.inf
    for _ in range(REPEATS):
        begun = time.perf_counter()
        make_plan(asked, VIRTUAL)
        best = min(best, time.perf_counter() - begun)
    return best


def run() -> None:
    """Print milliseconds, and the power of the turns that the cost grows with (1: in proportion)."""
    for pattern in ("even", "wander", "stagger", "ripple"):
        took = [seconds(pattern, turns) for turns in TURNS]
        shown = ", ".join(
            f"{turns:,}: {1000 * s:.0f} ms".replace(",", " ") for turns, s in zip(TURNS, took, strict=True)
        )
        power = math.log10(took[-1] / took[-2])
        print(f"  {pattern:8} {shown}; grows as turns ^ {power:.2f} at the end")
