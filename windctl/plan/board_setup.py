"""The limits of one coil, as the board is told them before anything is powered."""

from __future__ import annotations

from windctl.errors import PlanRefused
from windctl.lay.program import Program
from windctl.plan.speeds import (
    LEAST_RATE,
    LONGEST_STOP_S,
    accel_rpm_per_s,
    rate,
    steps_per_s,
    steps_per_turn,
)
from windctl.profile.model import MAX_STEP_HZ, MachineProfile
from windctl.protocol.messages import Capability, Setup
from windctl.recipe.model import Recipe
from windctl.recipe.tables import Tension

_ROTATION = {"cw": 0, "ccw": 1}

_NO_UPPER_BOUND = 0xFFFF
_SLIP_PART = 20  # of a turn: 18 degrees between issued steps and counted position
_REVERSE_PART = 8  # of a turn: 45 degrees of backing up, as a belt relaxes
_LEAST_COUNTS = 2  # a count may be one early and one late


def board_setup(
    recipe: Recipe,
    profile: MachineProfile,
    program: Program,
    coil_token: int,
) -> Setup:
    """The Setup of a coil. Raises PlanRefused where no board takes its ramps or its pace.

    The hard limits are the program's own: the count at which it ends, and the least and greatest
    position of the guide's motor in it, or what takes up the drive's play before the start. Without a
    drive, paces are counts/s, and a turn has as many steps as counts; where nothing follows the spindle
    either, its speed is the machine's affair and only max_rpm bounds it.
    """
    per_turn = steps_per_turn(profile)
    rpm = max(recipe.spindle.start_rpm, recipe.spindle.cruise_rpm, recipe.spindle.finish_rpm)
    driven = profile.spindle.drive == "step"
    if not driven and profile.guide.kind == "hand":
        rpm = max(rpm, profile.spindle.max_rpm)
    accel, decel = _rates(recipe, profile, per_turn) if driven else (LEAST_RATE, _least_decel(rpm, per_turn))
    pace = steps_per_s(rpm, per_turn)
    if pace > MAX_STEP_HZ:
        raise PlanRefused(f"{rpm:g} rpm is {pace} steps/s, and a board issues at most {MAX_STEP_HZ} steps/s")
    if pace > LONGEST_STOP_S * decel:
        braking = profile.spindle.decel_rpm_per_s
        raise PlanRefused(
            f"braking from {rpm:g} rpm at the machine's spindle.decel_rpm_per_s of {braking:g} rpm/s takes "
            f"{pace / decel:.3g} s, and a board allows {LONGEST_STOP_S} s; turn more slowly or brake harder"
        )
    low, high = _tension_band(recipe.tension, profile)
    counts = program.counts_per_turn
    return Setup(
        coil_token=coil_token,
        counts_per_turn=counts,
        steps_per_turn=per_turn,
        max_count=program.total_counts,
        max_pace=pace,
        accel=accel,
        decel=decel,
        guide_min=min(int(program.guide_marks.min()), -program.backlash_steps),
        guide_max=int(program.guide_marks.max()),
        slip_counts=max(_LEAST_COUNTS, counts // _SLIP_PART),
        reverse_counts=max(_LEAST_COUNTS, counts // _REVERSE_PART),
        tension_low=low,
        tension_high=high,
        fitted=int(_fitted(profile)),
        rotation=_ROTATION[recipe.orientation.spindle],
    )


def _rates(recipe: Recipe, profile: MachineProfile, per_turn: int) -> tuple[int, int]:
    """Slowing down and stopping use the machine's own braking: a Hold must not take longer for the sake of a
    gentle ramp."""
    spindle = profile.spindle
    ramp = accel_rpm_per_s(recipe, profile)
    key = (
        "spindle.ramp_rpm_per_s"
        if ramp == recipe.spindle.ramp_rpm_per_s
        else "the machine's spindle.accel_rpm_per_s"
    )
    return (
        rate(ramp, per_turn, key),
        rate(spindle.decel_rpm_per_s, per_turn, "the machine's spindle.decel_rpm_per_s"),
    )


def _least_decel(rpm: float, per_turn: int) -> int:
    """Nothing brakes without a drive; the figure only has to be one that the board takes."""
    return max(LEAST_RATE, -(-steps_per_s(rpm, per_turn) // LONGEST_STOP_S))


def _tension_band(tension: Tension | None, profile: MachineProfile) -> tuple[int, int]:
    """Bounds of the mean tension of a turn in sensor units; none without a sensor or a band."""
    scale = profile.tension.unit
    if tension is None or tension.set_cn is None or tension.band_cn is None or not profile.tension.sensor:
        return 0, _NO_UPPER_BOUND
    low = max(0, round((tension.set_cn - tension.band_cn) * 10_000 / scale))
    high = min(_NO_UPPER_BOUND, round((tension.set_cn + tension.band_cn) * 10_000 / scale))
    return min(low, high), high


def _fitted(profile: MachineProfile) -> Capability:
    fitted = Capability(0)
    for capability, has in (
        (Capability.DRIVE_STEP, profile.spindle.drive == "step"),
        (Capability.GUIDE_STEP, profile.guide.kind == "step"),
        (Capability.INDEX, profile.spindle.index),
        (Capability.CONTACT, profile.readings.by_contact),
        (Capability.TENSION, profile.tension.sensor),
        (Capability.PEDAL, profile.pedal),
    ):
        if has:
            fitted |= capability
    return fitted
