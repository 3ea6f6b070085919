"""Whether a machine can follow a program at the recipe's speeds: judged before anything is connected.

All speeds are those at the recipe's highest pace, wherever in the coil the segment lies.

- Guide speed: of every segment, at most guide.max_mm_per_s.
- Jump of speed: from one segment to the next. Going on the same way, or to or from standing, the jump is the
  difference. Turning round passes through standing, and a motor that may start or stop at a speed at
  once may do both: the jump is the greater of the two speeds. At most guide.start_stop_mm_per_s. The
  first segment starts with the spindle's own ramp and is no jump.
- Travel: from the least to the greatest motor position, play included, at most guide.travel_mm.
- Queue horizon: the board drives no further than the segments it holds. What is left of a full queue when one
  command's worth is still on its way must reach further than the spindle runs while a lost command is
  repeated and the board brakes; else the spindle would slow down in mid-coil.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from windctl.errors import PlanRefused
from windctl.lay.program import Program
from windctl.profile.model import MachineProfile
from windctl.recipe.model import Recipe

OFFLINE_QUEUE = 128  # segments, until a board says how many it holds
_ON_ITS_WAY = 12  # segments of one command
_REPEAT_S = 0.25  # until an unanswered command is sent again


@dataclass(frozen=True, slots=True)
class Checked:
    """What a program asks of its machine at `rpm`, the highest pace of the recipe."""

    rpm: float
    guide_mm_per_s: float
    jump_mm_per_s: float
    travel_mm: float
    horizon_turns: float
    braking_turns: float


def check(program: Program, recipe: Recipe, profile: MachineProfile) -> Checked:
    """Raises PlanRefused with everything that the machine cannot do, and what would make it possible."""
    spindle, guide = recipe.spindle, profile.guide
    rpm = max(spindle.start_rpm, spindle.cruise_rpm, spindle.finish_rpm)
    found = measure(program, profile, rpm)
    limit = profile.spindle.max_rpm
    refusals = []
    if rpm > limit:
        refusals.append(
            f"the recipe turns at {rpm:g} rpm, and the machine's spindle.max_rpm is {limit:g} rpm; "
            "lower spindle.cruise_rpm"
        )
    for what, value, key, most in (
        ("goes up to", found.guide_mm_per_s, "guide.max_mm_per_s", guide.max_mm_per_s),
        ("changes its speed by", found.jump_mm_per_s, "guide.start_stop_mm_per_s", guide.start_stop_mm_per_s),
    ):
        if value > most:
            slower = most / value
            refusals.append(
                f"at {rpm:g} rpm the guide {what} {value:.3g} mm/s, and {key} is {most:g} mm/s; at most "
                f"{rpm * slower:.0f} rpm, or a mean pitch of at most {recipe.pitch_mm * slower:.3g} mm"
            )
    if found.travel_mm > guide.travel_mm:
        refusals.append(
            f"the guide travels {found.travel_mm:.4g} mm, its play included, and the machine's "
            f"guide.travel_mm is {guide.travel_mm:g} mm; raise lay.margin_mm or take a machine with more"
        )
    if found.horizon_turns < found.braking_turns:
        refusals.append(
            f"at {rpm:g} rpm the spindle needs {found.braking_turns:.3g} turns to stop, and the segments "
            f"in the board's queue may reach only {found.horizon_turns:.3g} turns ahead; turn more slowly, "
            "brake harder (spindle.decel_rpm_per_s), or use a board with more board.queue_segments"
        )
    if refusals:
        raise PlanRefused("\n".join(refusals))
    return found


def measure(program: Program, profile: MachineProfile, rpm: float) -> Checked:
    """What the program asks for at `rpm`, without judging it."""
    speeds = guide_speeds(program, rpm)
    marks = program.guide_marks
    travel = int(marks.max() - marks.min()) / program.steps_per_mm
    queue = profile.board.queue_segments or OFFLINE_QUEUE
    return Checked(
        rpm,
        float(np.abs(speeds).max()),
        float(jumps(speeds).max(initial=0.0)),
        travel,
        _horizon_turns(program, queue),
        braking_turns(rpm, profile.spindle.decel_rpm_per_s) + rpm / 60 * _REPEAT_S,
    )


def guide_speeds(program: Program, rpm: float) -> NDArray[np.float64]:
    """f64[n]: the guide motor's speed in each segment at `rpm`, mm/s, positive away from the start flange."""
    counts_per_s = rpm / 60 * program.counts_per_turn
    return program.guide / program.counts.astype(np.float64) * (counts_per_s / program.steps_per_mm)


def jumps(speeds: NDArray[np.float64]) -> NDArray[np.float64]:
    """f64[n - 1]: the jump from each segment to the next, mm/s, as defined above."""
    before, after = speeds[:-1], speeds[1:]
    turns_round = before * after < 0
    greater = np.maximum(np.abs(before), np.abs(after))
    return np.where(turns_round, greater, np.abs(after - before))


def braking_turns(rpm: float, decel_rpm_per_s: float) -> float:
    """Turns from `rpm` to standing: v * v = 2 * a * s."""
    return rpm * rpm / (2 * 60 * decel_rpm_per_s)


def _horizon_turns(program: Program, queue: int) -> float:
    """The least that the queue reaches ahead, turns; without bound where it holds the whole program."""
    held = max(1, queue - _ON_ITS_WAY)
    if held >= program.segments:
        return float("inf")
    marks = program.count_marks
    return int((marks[held:] - marks[:-held]).min()) / program.counts_per_turn
