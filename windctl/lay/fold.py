"""From travel to segments: fold at the turn-rounds, take up the play, cut into what a segment can hold."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from windctl.lay.fixed import SUB, SUB_BITS
from windctl.lay.program import MOST_COUNTS, MOST_STEPS
from windctl.lay.spec import LaySpec
from windctl.lay.travel import Travel
from windctl.lay.turn_rounds import TurnRounds, passes_within, turn_rounds

I64 = NDArray[np.int64]


def segments_of(spec: LaySpec, travel: Travel) -> tuple[I64, I64]:
    """(counts, guide) of every segment, i64 each; counts fit u16 and guide i16.

    Segments end where the guide turns round, where a turn-round's play is taken up, and where the pitch
    changes. A change of pitch within a quarter turn of one of the others is left to its neighbours, so
    that no segment is so short that whole steps misstate its speed. Positions are rounded to whole steps
    at the ends of segments, from the exact travel: nothing accumulates.
    """
    total = spec.total_counts
    rounds = turn_rounds(spec, passes_within(spec, int(travel.sub_steps[-1])))
    crossed = int(np.searchsorted(rounds.at, travel.sub_steps[-1], side="left")) - 1
    turned = travel.reached(rounds.at[1 : crossed + 1])
    turned = turned[turned < total]
    take_up = _take_up_counts(spec, turned)
    marks = _marks(spec, travel, turned, take_up)
    motor = _motor_steps(spec, travel, rounds, turned, take_up, marks)
    return _cut(np.diff(marks), np.diff(motor))


def _take_up_counts(spec: LaySpec, turned: I64) -> int:
    """spec.take_up, but at most half of the shortest pass."""
    if not spec.backlash:
        return 0
    shortest = int(np.diff(turned).min()) if len(turned) > 1 else spec.total_counts
    return max(1, min(spec.take_up, shortest // 2))


def _marks(spec: LaySpec, travel: Travel, turned: I64, take_up: int) -> I64:
    """Counts at which segments end, from 0 to the last, strictly rising."""
    total = spec.total_counts
    fixed = np.concatenate([np.zeros(1, dtype=np.int64), turned, np.array([total], dtype=np.int64)])
    near = max(1, spec.counts_per_turn // 4)
    if take_up:
        taken = turned + take_up
        fixed = np.sort(np.concatenate([fixed, taken[_distance(fixed, taken) >= near]]))
    if not travel.bends:
        return fixed
    bends = travel.counts[(travel.counts > 0) & (travel.counts < total)]
    return np.sort(np.concatenate([fixed, bends[_distance(fixed, bends) >= near]]))


def _distance(marks: I64, counts: I64) -> I64:
    """How far each of `counts` is from the nearest of `marks` (sorted, starting at 0); past the last: -1."""
    after = np.searchsorted(marks, counts, side="left")
    inside = after < len(marks)
    after = np.minimum(after, len(marks) - 1)
    nearest = np.minimum(marks[after] - counts, counts - marks[np.maximum(after - 1, 0)])
    return np.where(inside, nearest, -1)


def _motor_steps(
    spec: LaySpec, travel: Travel, rounds: TurnRounds, turned: I64, take_up: int, marks: I64
) -> I64:
    """Guide motor position at each mark, whole steps from the datum.

    Pass k leads from turn-round k to k + 1, outward where k is even. Moving outward the guide is where
    the motor is; moving back it is spec.backlash steps further out. After a turn-round the motor crosses
    that play evenly within `take_up` counts.
    """
    number = np.searchsorted(turned, marks, side="right")
    outward = number % 2 == 0
    gone = np.maximum(travel.at(marks) - rounds.at[number], 0)
    starts = np.concatenate([np.zeros(1, dtype=np.int64), turned])
    at_turn = marks == starts[number]
    gone = np.where(at_turn, 0, np.minimum(gone, rounds.at[number + 1] - rounds.at[number]))
    steps = (gone + SUB // 2) >> SUB_BITS
    guide = rounds.places[number] + np.where(outward, steps, -steps)
    if not spec.backlash:
        return guide
    crossed = spec.backlash * np.minimum(marks - starts[number], take_up) // take_up
    crossed = np.where(number == 0, spec.backlash, crossed)
    return guide - np.where(outward, spec.backlash - crossed, crossed)


def _cut(counts: I64, guide: I64) -> tuple[I64, I64]:
    """Segments longer than u16 counts or i16 steps in equal parts."""
    parts = np.maximum(-(-counts // MOST_COUNTS), -(-np.abs(guide) // MOST_STEPS))
    if len(parts) == int(parts.sum()):
        return counts, guide
    parts = np.maximum(parts, 1)
    first = np.repeat(np.cumsum(parts) - parts, parts)
    part = np.arange(int(parts.sum()), dtype=np.int64) - first
    whole = np.repeat(parts, parts)
    return _part(np.repeat(counts, parts), part, whole), _part(np.repeat(guide, parts), part, whole)


def _part(amount: I64, part: I64, parts: I64) -> I64:
    """Part number `part` of `amount` divided into `parts` that add up to it and differ by at most one."""
    return amount * (part + 1) // parts - amount * part // parts
