"""How well the forecast does on drawn coils, beside its bound and other ways, and what a reading costs.

`WINDCTL_BENCH_SEED` picks the coils, `WINDCTL_BENCH_COILS` how many (200).
"""

from __future__ import annotations

import os
import time
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tests.forecast.bound import bound, grown
from tests.forecast.rivals import Filterpy, parabola, proportional
from tests.forecast.truth import DEFAULT, FINE, TURNS, Instruments, Truth, draw, prior_for, with_bounce
from windctl.forecast.estimator import begin, update
from windctl.forecast.finish import finish_at

Floats = NDArray[np.float64]
GAUGE, MEASURED = Truth(), Truth(wire_sd=0.005)
EVEN = Truth(packing=(0.67, 0.80))
EVERY = 10.0  # turns between live readings


@dataclass(frozen=True)
class Situation:
    """A row of the table: which readings there are, and the rms that is asked for, in per cent."""

    name: str
    truth: Truth
    meter: Instruments
    turns: Floats
    asked: float | None
    resting: bool = False
    cold: bool = False


def live(until: float) -> Floats:
    return np.arange(EVERY, until * TURNS + 1.0, EVERY)


def checks(*parts: float) -> Floats:
    return np.array(parts) * TURNS


SITUATIONS = (
    Situation("none, gauge table only", GAUGE, FINE, checks(), 4.5),
    Situation("none, spool measured to 0.5 %", MEASURED, FINE, checks(), 1.4),
    Situation("one check at 50 %, fine", GAUGE, FINE, checks(0.5), 0.60, resting=True),
    Situation("checks at 30 and 85 %, fine", GAUGE, FINE, checks(0.3, 0.85), 0.085, resting=True),
    Situation("live up to 25 %, fine", GAUGE, FINE, live(0.25), 0.28),
    Situation("live up to 50 %, fine", GAUGE, FINE, live(0.50), 0.12),
    Situation("live up to 75 %, fine", GAUGE, FINE, live(0.75), 0.065),
    Situation("live up to 50 %, fine, 2 % bounce", GAUGE, with_bounce(FINE), live(0.50), None),
    Situation("live up to 50 %, fine, even lay", EVEN, FINE, live(0.50), None),
    Situation(
        "settled reading, 0.5 K, 0.3 %, cooled", GAUGE, DEFAULT, checks(1.0), 0.38, resting=True, cold=True
    ),
    Situation("settled reading, still warm", GAUGE, DEFAULT, checks(1.0), 0.48, resting=True),
)


def score(row: Situation, first_seed: int, coils: int) -> dict[str, float]:
    """Relative figures over the coils, in per cent."""
    prior = prior_for(row.truth, row.meter)
    ours, halves, rule, fit, gated, read = [], [], [], [], 0, 0
    for seed in range(first_seed, first_seed + coils):
        coil = draw(seed, row.truth, row.meter)
        readings = coil.readings(row.turns, resting=row.resting, cold=row.cold)
        true = float(coil.ohm[TURNS])
        estimate = begin(prior)
        for reading in readings:
            estimate, used = update(estimate, reading)
            gated, read = gated + (not used), read + 1
        finish = finish_at(estimate, TURNS)
        ours.append(finish.ohm / true - 1.0)
        halves.append((finish.high - finish.ohm) / true)
        if readings and row.meter.bounce == 0.0:  # one infinite reading spoils the rules of thumb
            rule.append(proportional(prior, readings, TURNS) / true - 1.0)
        if len(readings) >= 3 and row.meter.bounce == 0.0:
            fit.append(parabola(prior, readings, TURNS) / true - 1.0)
    each = max(1, len(row.turns) // 100)  # many dense readings are as good as few sharper ones
    places = row.turns[each // 2 :: each]
    least = bound(grown(row.truth, 1000), places, row.meter, resting=row.resting, cold=row.cold, each=each)
    rms = _rms(ours)
    return {
        "rms": 100 * rms,
        "held": 100 * float(np.mean(np.abs(ours) <= np.array(halves))),
        "sharp": float(np.median(halves)) / rms,
        "bound": rms / least,
        "rule": 100 * _rms(rule),
        "parabola": 100 * _rms(fit),
        "gated": 100 * gated / max(read, 1),
    }


def _rms(values: list[float]) -> float:
    return float(np.sqrt(np.mean(np.square(values)))) if values else float("nan")


def run() -> None:
    """Print the table, and the cost of a reading."""
    seed = int(os.environ.get("WINDCTL_BENCH_SEED", "1")) * 1_000_000
    coils = int(os.environ.get("WINDCTL_BENCH_COILS", "200"))
    print(f"  {coils} coils of {TURNS} turns a row, a live reading every {EVERY:.0f} turns, drawn from")
    print(f"  {GAUGE}\n  fine {FINE}\n  else {DEFAULT}")
    print(f"  {'':38} asked   rms %  held %  half/rms  rms/bound  rule %  parabola %  gated %")
    for row in SITUATIONS:
        s = score(row, seed, coils)
        asked = "" if row.asked is None else f"{row.asked:.3f}"
        print(
            f"  {row.name:38} {asked:>5} {s['rms']:7.4f} {s['held']:7.1f} {s['sharp']:9.2f} "
            f"{s['bound']:10.2f} {s['rule']:7.3f} {s['parabola']:11.3f} {s['gated']:8.3f}"
        )
    cost(seed)


def cost(seed: int) -> None:
    """Time of one reading, ours and filterpy's with the same model, and how far the two answers lie apart."""
    prior = prior_for(GAUGE, FINE)
    readings = draw(seed, GAUGE, FINE).readings(live(0.5))
    best = float("inf")
    for _ in range(5):
        estimate, start = begin(prior), time.perf_counter()
        for reading in readings:
            estimate, _ = update(estimate, reading)
        best = min(best, (time.perf_counter() - start) / len(readings))
    print(f"  a reading costs {best * 1e6:.1f} us", end="")
    try:
        theirs = float("inf")
        for _ in range(3):
            other, start = Filterpy(prior), time.perf_counter()
            for reading in readings:
                other.take(reading)
            theirs = min(theirs, (time.perf_counter() - start) / len(readings))
    except ModuleNotFoundError:
        print("; filterpy is not installed, so there is nothing to compare it with")
        return
    ohm, sd = other.finish(TURNS)
    ours = finish_at(estimate, TURNS)
    print(
        f", in filterpy {theirs * 1e6:.1f} us; finished resistance {ours.ohm:.3f} +- {ours.sd:.3f} ohm "
        f"against {ohm:.3f} +- {sd:.3f} ohm"
    )
