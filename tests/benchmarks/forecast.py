"""How well the forecast does on drawn coils, beside its bound and other ways, what a bad contact does to it,
and what a reading costs; how well the next coil of a lot is foreseen; what is found of unknown coils.

`WINDCTL_BENCH_SEED` picks the coils, `WINDCTL_BENCH_COILS` how many (200), `WINDCTL_BENCH_LOTS` how many lots
(100).
"""

from __future__ import annotations

import os
import time
from dataclasses import replace
from functools import cache
from math import nan

from tests.benchmarks import _contact, _learning
from tests.forecast.bound import bound, grown, least_without_readings
from tests.forecast.rivals import Filterpy
from tests.forecast.scoring import Floats, Score, follow, rms, told_apart
from tests.forecast.situations import EVERY, GAUGE, OUTSIDE, Situation, checks, live, situations
from tests.forecast.truth import DEFAULT, FINE, SHAPES, TURNS, Truth, draw, prior_for
from windctl.forecast.estimator import begin, update
from windctl.forecast.finish import finish_at

_STAGES = (0.125, 0.25, 0.5, 0.75, 0.9)
_CHECKS = (0.3, 0.85)
_BOUND_COILS = 1000
_FEW = 400
_OTHERS = ("rule", "parabola", "filterpy")


def run() -> None:
    """Print the tables, and the cost of a reading."""
    seed = int(os.environ.get("WINDCTL_BENCH_SEED", "1"))
    coils = int(os.environ.get("WINDCTL_BENCH_COILS", "200"))
    lots = int(os.environ.get("WINDCTL_BENCH_LOTS", "100"))
    seeds = range(seed * 1_000_000, seed * 1_000_000 + coils)
    table(seeds)
    _learning.like_coils(seeds)
    outside(seeds)
    _contact.alarms(seeds)
    _contact.bad_first_reading(range(seeds[0], seeds[0] + 2 * coils))
    cost(seeds[0])
    _learning.lots(seeds[0], lots)
    _learning.unknown(seeds[0], coils)


def table(seeds: range) -> None:
    """The table; per cent, and an rms with its standard error. Of the bound, see `bound`."""
    print(f"  {len(seeds)} coils of {TURNS} turns a row, a live reading every {EVERY:g} turns, drawn from")
    print(f"  {GAUGE}\n  fine {FINE}\n  else {DEFAULT}")
    print(
        f"  {'':31}read to  asked  rms %   +-    held %  half/rms  rms/bound  rule %  parabola %  filterpy %"
    )
    for row in situations():
        clean = row.meter.bounce == 0.0  # one infinite reading spoils the other ways
        others = _OTHERS if clean and len(row.turns) else ()
        if len(row.turns) > 100 and row.truth != GAUGE:
            others = others[:2]  # filterpy takes its time, and has had these readings once
        seen = follow(
            seeds, row.truth, row.meter, row.turns, row.at, resting=row.resting, cold=row.cold, rivals=others
        )
        for place, ((part, asked), score) in enumerate(zip(row.stages, seen.stages, strict=True)):
            limit = "" if asked is None else f"{100 * asked:.3f}"
            best = score.rms / _least(row, part)
            theirs = [100 * rms(seen.rivals[name][place]) if name in others else nan for name in _OTHERS]
            print(
                f"  {row.name:30} {100 * part:5.1f} % {limit:>6} {_figures(score)} {best:10.2f} "
                f"{theirs[0]:8.3f} {theirs[1]:10.3f} {theirs[2]:11.4f}"
            )
        if not clean:
            print(f"  {'':30} readings kept out: {100 * seen.gated / seen.read:.2f} %")
        if not len(row.turns):
            least, se = least_without_readings(row.truth)
            print(f"  {'':30} the best that any forecast can do: {100 * least:.3f} +- {100 * se:.3f} %")


def _figures(score: Score) -> str:
    return f"{100 * score.rms:7.4f} {100 * score.rms_se:6.4f} {100 * score.held:6.1f} {score.sharp:9.2f}"


def _least(row: Situation, part: float) -> float:
    """The bound of a row at a stage."""
    turns = row.turns[row.turns <= part * TURNS]
    each = max(1, len(turns) // 100)  # many dense readings are as good as few sharper ones
    if row.resting and len(set(turns)) == 1:
        turns, each = turns[:1], len(turns)
    places = turns[each // 2 :: each] if each < len(turns) else turns
    return bound(_grown(row.truth), places, row.meter, resting=row.resting, cold=row.cold, each=each)


@cache
def _grown(truth: Truth) -> Floats:
    return grown(truth, _BOUND_COILS)


def outside(seeds: range) -> None:
    """Truths that the prior does not hold, by stage; and whether the readings could have told."""
    print("  truths from outside the prior's family, fine, a live reading every 10 turns:")
    print(f"  rms % / held % / half-width over rms; from the second on at most {_FEW} coils")
    for name, truth, meter in OUTSIDE:
        print(f"  {name}: {_differences(truth, GAUGE)} {_differences(meter, FINE)}".rstrip())
    at_checks = [part * TURNS for part in _CHECKS]
    heads = [f"{100 * part:.1f} %" for part in _STAGES] + [f"check, {100 * part:.0f} %" for part in _CHECKS]
    print(f"  {'read to':30}" + "".join(f"{head:>21}" for head in heads))
    for name, truth, meter in OUTSIDE:
        at = [part * TURNS for part in _STAGES]
        some = seeds if truth == SHAPES and meter == FINE else seeds[:_FEW]
        seen = follow(some, truth, meter, live(0.9, 10.0), at, prior=prior_for(GAUGE, FINE))
        checked = follow(
            some, truth, meter, checks(*_CHECKS), at_checks, resting=True, prior=prior_for(GAUGE, FINE)
        )
        stages = seen.stages + checked.stages
        cells = [f"{100 * one.rms:8.3f} /{100 * one.held:5.1f} /{one.sharp:5.2f}" for one in stages]
        print(f"  {name:30}" + "".join(cells))
    print(
        "  logarithm of the likelihood ratio of a prior with such drifts over the usual one, median of coils;"
    )
    print("  where it is below 1, no estimator can know from the readings that the drift is more than stated")
    for times, (name, truth, _) in zip((2.0, 3.0, 5.0), OUTSIDE[-3:], strict=True):
        usual = prior_for(GAUGE, FINE)
        wider = replace(
            usual, growth_walk_rel=times * usual.growth_walk_rel, wire_walk_rel=times * usual.wire_walk_rel
        )
        found = told_apart(
            seeds[: _FEW // 4], truth, wider, live(0.9, 10.0), [part * TURNS for part in _STAGES]
        )
        print(f"  {name:30}" + "".join(f"{one:21.2f}" for one in found))


def _differences(one: object, other: object) -> str:
    """What a truth or a meter has that the usual one has not."""
    return ", ".join(
        f"{name}={getattr(one, name)}"
        for name in one.__dataclass_fields__  # type: ignore[attr-defined]  # a dataclass
        if getattr(one, name) != getattr(other, name)
    )


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
        f", in filterpy {theirs * 1e6:.1f} us: {best / theirs:.2f} times; finished resistance "
        f"{ours.ohm:.3f} +- {ours.sd:.3f} ohm against {ohm:.3f} +- {sd:.3f} ohm"
    )
