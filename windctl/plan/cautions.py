"""What can go wrong with a coil, in plain words."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from windctl.coil.fit import Fit
from windctl.coil.wire_speed import WireSpeed
from windctl.material.wire import Wire
from windctl.plan.speeds import accel_rpm_per_s
from windctl.profile.model import MachineProfile
from windctl.recipe.model import Recipe

_BREAKS_N_PER_MM2 = 220.0  # annealed copper, 200 to 250 MPa (from memory)
_ADVISED_PULL = 0.2  # of what breaks the wire. Our judgement
_FAST_M_S = 3.0  # peak wire speed from which the pull of a long bobbin is worth a word. Our judgement
_PULSING = 1.15  # peak over mean from which a bobbin counts as long. Our judgement


@dataclass(frozen=True, slots=True)
class Outlook:
    """wanted_turns: before stop.min_turns and max_turns limit them; full_speed: on the finished coil."""

    turns: int
    wanted_turns: float
    fit: Fit
    full_speed: WireSpeed


def cautions(recipe: Recipe, profile: MachineProfile, wire: Wire, outlook: Outlook) -> tuple[str, ...]:
    """Everything that the winder should know before cutting wire, the weightiest first."""
    return (
        *_fit(outlook),
        *_target(recipe, profile, outlook),
        *_lay(recipe, wire),
        *_pull(recipe, wire),
        *_speed(recipe, profile, outlook),
        *_machine(recipe, profile),
    )


def _fit(outlook: Outlook) -> Iterator[str]:
    fit = outlook.fit
    if fit.fits == "yes":
        return
    figures = (
        f"the long sides build up to {fit.side_build_mm:.2f} mm, give or take {2 * fit.side_sd_mm:.2f} mm"
    )
    if fit.fits == "tight":
        yield f"a tight fit: {figures}, and the flange is {fit.room_mm:g} mm deep"
    else:
        about = outlook.turns * fit.room_mm / fit.side_build_mm
        yield (
            f"it will not fit: {figures}, and the flange is only {fit.room_mm:g} mm deep; "
            f"about {about:.0f} turns would fill it"
        )


def _target(recipe: Recipe, profile: MachineProfile, outlook: Outlook) -> Iterator[str]:
    if abs(outlook.wanted_turns - outlook.turns) > 1:
        yield (
            f"the target asks for about {outlook.wanted_turns:.0f} turns, beyond the recipe's limits of "
            f"{recipe.stop.min_turns} to {recipe.stop.max_turns}; it stops at {outlook.turns}"
        )
    if recipe.stop.dcr_20c_ohm is not None and profile.readings.mode == "none":
        yield (
            "the target is a resistance, and nothing is read while winding (readings.mode is none): the coil "
            "stops at the planned turns, its resistance as uncertain as the spool; use readings.mode checks"
        )


def _lay(recipe: Recipe, wire: Wire) -> Iterator[str]:
    if recipe.lay.style == "scatter" and recipe.pitch_mm < wire.overall_mm:
        yield (
            f"a dense scatter: the mean pitch of {recipe.pitch_mm:.3g} mm is less than the wire's overall "
            f"diameter of {wire.overall_mm:.3g} mm, so turns climb on their neighbours"
        )


def _pull(recipe: Recipe, wire: Wire) -> Iterator[str]:
    tension = recipe.tension
    if tension is None or tension.set_cn is None:
        return
    breaks_cn = 100 * _BREAKS_N_PER_MM2 * wire.copper_area_mm2
    highest = tension.set_cn + (tension.band_cn or 0.0)
    if tension.set_cn > _ADVISED_PULL * breaks_cn:
        yield (
            f"tension.set_cn of {tension.set_cn:g} cN is {100 * tension.set_cn / breaks_cn:.0f} % of the "
            f"{breaks_cn:.0f} cN that break this wire; we advise at most {_ADVISED_PULL * breaks_cn:.0f} cN "
            "(our judgement)"
        )
    elif highest > 2 * _ADVISED_PULL * breaks_cn:
        yield (
            f"tension.band_cn lets the tension rise to {highest:g} cN, {100 * highest / breaks_cn:.0f} % of "
            f"the {breaks_cn:.0f} cN that break this wire (our judgement)"
        )


def _speed(recipe: Recipe, profile: MachineProfile, outlook: Outlook) -> Iterator[str]:
    speed = outlook.full_speed
    if speed.peak_m_s > _FAST_M_S and speed.peak_m_s > _PULSING * speed.mean_m_s:
        yield (
            f"at {recipe.spindle.cruise_rpm:g} rpm the wire runs onto the finished coil at "
            f"{speed.mean_m_s:.1f} m/s and jerks to {speed.peak_m_s:.1f} m/s twice a turn, and its inertia "
            "pulls: a lower spindle.cruise_rpm is gentler on it"
        )
    accel = accel_rpm_per_s(recipe, profile)
    if accel < recipe.spindle.ramp_rpm_per_s:
        yield (
            f"spindle.ramp_rpm_per_s of {recipe.spindle.ramp_rpm_per_s:g} rpm/s is more than the machine's "
            f"{accel:g} rpm/s, which it will use"
        )


def _machine(recipe: Recipe, profile: MachineProfile) -> Iterator[str]:
    if profile.spindle.drive == "none":
        yield "no spindle drive is fitted: this program counts and tells, and cannot stop the machine"
    if profile.guide.kind == "hand":
        yield (
            "the wire is guided by hand: the lay is the hand's, and the build foreseen is that of the "
            "recipe's lay, laid perfectly"
        )
    if not profile.tension.sensor:
        band = recipe.tension is not None and recipe.tension.band_cn is not None
        watched = ", and tension.band_cn is not watched" if band else ""
        shows = (
            "a broken wire shows only in the reading"
            if profile.readings.mode == "live"
            else "a broken wire does not show until the resistance is read"
        )
        yield f"no tension sensor is fitted: {shows}{watched}"
