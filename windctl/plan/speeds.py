"""Spindle speeds in the board's integers, and the time that a coil takes at them."""

from __future__ import annotations

import math

from windctl.errors import PlanRefused
from windctl.lay.fixed import exact, nearest
from windctl.lay.limits import braking_turns
from windctl.plan.pace import PaceSpec
from windctl.profile.model import MachineProfile
from windctl.recipe.model import Recipe
from windctl.recipe.tables import Spindle

LEAST_RATE = 100  # steps/s2 of acceleration and of braking that a board takes
LONGEST_STOP_S = 10  # from full pace that a board takes

# From a count being passed to the board slowing down: a report every 50 ms, both ways over the line, and a
# command that has to be sent again.
_REACTION_S = 0.35


def steps_per_turn(profile: MachineProfile) -> int:
    """Units of pace in a turn: motor steps, and counts where no drive is fitted."""
    spindle = profile.spindle
    return spindle.steps_per_turn if spindle.drive == "step" else spindle.counts_per_turn


def steps_per_s(rpm: float, per_turn: int) -> int:
    """A speed as a pace, to the nearest whole step per second, at least 1."""
    return max(1, nearest(exact(rpm) * per_turn / 60))


def accel_rpm_per_s(recipe: Recipe, profile: MachineProfile) -> float:
    """The recipe's ramp, as far as the machine goes along."""
    return min(recipe.spindle.ramp_rpm_per_s, profile.spindle.accel_rpm_per_s)


def rate(rpm_per_s: float, per_turn: int, key: str) -> int:
    """A change of speed in steps/s2. Raises PlanRefused where a board does not take it."""
    steps = nearest(exact(rpm_per_s) * per_turn / 60)
    if steps < LEAST_RATE:
        raise PlanRefused(
            f"{key} of {rpm_per_s:g} rpm/s is {steps} steps/s2 at {per_turn} steps per turn, and a board "
            f"takes at least {LEAST_RATE}; {LEAST_RATE * 60 / per_turn:g} rpm/s is the least"
        )
    return steps


def pace_spec(recipe: Recipe, profile: MachineProfile) -> PaceSpec:
    """The recipe's paces on this machine.

    The slowing begins early enough that all of finish_turns are wound at finish_rpm: the way that
    braking from cruise_rpm takes, and what passes before the board hears of it, come before them.
    """
    spindle, counts = recipe.spindle, profile.spindle.counts_per_turn
    per_turn = steps_per_turn(profile)
    decel = profile.spindle.decel_rpm_per_s
    slowing = braking_turns(spindle.cruise_rpm, decel) - braking_turns(spindle.finish_rpm, decel)
    slowing += spindle.cruise_rpm / 60 * _REACTION_S
    return PaceSpec(
        start_pace=steps_per_s(spindle.start_rpm, per_turn),
        start_counts=spindle.start_turns * counts,
        cruise_pace=steps_per_s(spindle.cruise_rpm, per_turn),
        finish_pace=steps_per_s(spindle.finish_rpm, per_turn),
        finish_counts=spindle.finish_turns * counts + math.ceil(slowing * counts),
    )


def duration_s(spindle: Spindle, accel_rpm_per_s: float, decel_rpm_per_s: float, turns: float) -> float:
    """Winding time of `turns` turns from standing to standing, ramps included, s.

    Three stretches, each with its own highest speed; the speed where they meet is what can be reached
    from the one side and braked to on the other. Within a stretch the spindle speeds up, runs and slows down.
    """
    accel, decel = accel_rpm_per_s / 60, decel_rpm_per_s / 60
    start = min(float(spindle.start_turns), turns)
    finish = min(float(spindle.finish_turns), turns - start)
    stretches = [
        (start, spindle.start_rpm / 60),
        (turns - start - finish, spindle.cruise_rpm / 60),
        (finish, spindle.finish_rpm / 60),
    ]
    meets = [0.0, min(stretches[0][1], stretches[1][1]), min(stretches[1][1], stretches[2][1]), 0.0]
    for i, (way, _) in enumerate(stretches):
        meets[i + 1] = min(meets[i + 1], math.sqrt(meets[i] ** 2 + 2 * accel * way))
    for i, (way, _) in reversed(list(enumerate(stretches))):
        meets[i] = min(meets[i], math.sqrt(meets[i + 1] ** 2 + 2 * decel * way))
    return sum(
        _stretch_s(way, most, meets[i], meets[i + 1], accel, decel) for i, (way, most) in enumerate(stretches)
    )


def _stretch_s(way: float, most: float, first: float, last: float, accel: float, decel: float) -> float:
    """Seconds for `way` turns from speed `first` to `last`, at most at `most`; in turns/s and turns/s2."""
    if way <= 0:
        return 0.0
    top = min(
        most, math.sqrt((2 * accel * decel * way + decel * first**2 + accel * last**2) / (accel + decel))
    )
    rising, falling = max(top - first, 0.0) / accel, max(top - last, 0.0) / decel
    ramps = (top + first) / 2 * rising + (top + last) / 2 * falling
    return rising + falling + max(way - ramps, 0.0) / top
