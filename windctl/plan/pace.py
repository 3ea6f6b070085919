"""How fast the spindle should turn at each place of a coil: slow first turns, cruise, slow last turns."""

from __future__ import annotations

from dataclasses import dataclass

OWN_MOTOR_SLOW_TURNS = 50.0  # before the stop, from where somebody's own motor is to be slowed; our judgement


@dataclass(frozen=True, slots=True)
class PaceSpec:
    """Paces in spindle steps per second (without a drive: counts per second), places in counts; all integers.

    finish_counts is how far before the stop point the slowing begins: the slow last turns and, before them,
    the way it takes to slow down from cruise_pace, so that all of the last turns are slow.
    """

    start_pace: int
    start_counts: int
    cruise_pace: int
    finish_pace: int
    finish_counts: int


def pace_for(spec: PaceSpec, count: int, stop_count: int | None) -> int:
    """The pace to work towards at `count`, with the stop point at `stop_count` (None: not yet known)."""
    pace = spec.cruise_pace
    if count < spec.start_counts:
        pace = min(pace, spec.start_pace)
    if stop_count is not None and stop_count - count <= spec.finish_counts:
        pace = min(pace, spec.finish_pace)
    return pace


def most_pace(spec: PaceSpec, percent: int) -> int:
    """Steps/s at the most when somebody wants `percent` of the cruising pace: never faster than the plan was
    checked at, and never slower than its first turns."""
    least = min(spec.start_pace, spec.cruise_pace)
    return max(least, min(spec.cruise_pace, spec.cruise_pace * percent // 100))


def least_percent(spec: PaceSpec) -> int:
    """The least percentage that makes a difference."""
    return min(100, -(-100 * min(spec.start_pace, spec.cruise_pace) // spec.cruise_pace))
