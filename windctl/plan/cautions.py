"""What can go wrong with a coil, in plain words."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from windctl.coil.fit import Fit
from windctl.coil.wire_speed import WireSpeed
from windctl.lay.ribbons import Ribbon, nearest_clear
from windctl.material.wire import Wire
from windctl.numbers import grouped
from windctl.plan.experience.supply import Left
from windctl.plan.speeds import accel_rpm_per_s
from windctl.profile.model import MachineProfile
from windctl.recipe.model import Recipe

BREAKS_N_PER_MM2 = 220.0  # annealed copper, 200 to 250 MPa (from memory)
_ADVISED_PULL = 0.2  # of what breaks the wire. Our judgement
# Peak wire speed on a bobbin that is not round, over the bare diameter. What guides and brakes the wire is
# jerked twice a turn; on a given bobbin the jerk goes with the square of the speed, and so does a wire's
# strength with its diameter: so half as thick a wire takes half the speed. Our judgement
_FASTEST_M_S_PER_MM = 63.0  # 4.0 m/s for 0.063 mm
_SURELY_ENOUGH = 2.0  # standard deviations of the wire left
_PULSING = 1.15  # peak over mean from which a bobbin counts as long. Our judgement
_OPEN_LAY = 1.5  # pitch over overall diameter from which ribbons have gaps between them. Our judgement


@dataclass(frozen=True, slots=True)
class Outlook:
    """wanted_turns: before stop.min_turns and max_turns limit them; full_speed: on the finished coil; ribbon:
    in the program, where a motor guides."""

    turns: int
    wanted_turns: float
    fit: Fit
    full_speed: WireSpeed
    ribbon: Ribbon | None = None
    wire_m: float = 0.0  # that the coil takes
    left: Left | None = None  # on its spool


def cautions(recipe: Recipe, profile: MachineProfile, wire: Wire, outlook: Outlook) -> tuple[str, ...]:
    """Everything that the winder should know before cutting wire, the weightiest first."""
    return (
        *_fit(outlook),
        *_wire_left(outlook),
        *_target(recipe, profile, outlook),
        *_lay(recipe, wire),
        *_ribbons(recipe, wire, outlook),
        *_pull(recipe, wire),
        *_speed(recipe, profile, wire, outlook),
        *_machine(recipe, profile),
    )


def fastest_m_s(wire: Wire) -> float:
    """The peak wire speed that is advised at most on a bobbin that is not round, m/s. Our judgement."""
    return _FASTEST_M_S_PER_MM * wire.bare_mm


def _fit(outlook: Outlook) -> Iterator[str]:
    fit = outlook.fit
    if fit.fits == "yes":
        return
    figures = (
        f"the long sides build up to {fit.side_build_mm:.1f} mm, give or take {2 * fit.side_sd_mm:.1f} mm"
    )
    if fit.fits == "tight":
        yield f"a tight fit: {figures}, and the flange is {fit.room_mm:g} mm deep"
    else:
        about = outlook.turns * fit.room_mm / fit.side_build_mm
        yield (
            f"it will not fit: {figures}, and the flange is only {fit.room_mm:g} mm deep; "
            f"about {grouped(about)} turns would fill it"
        )


def _wire_left(outlook: Outlook) -> Iterator[str]:
    left = outlook.left
    if left is None or outlook.wire_m < left.metres - _SURELY_ENOUGH * left.sd:
        return
    words = "is likely to" if outlook.wire_m > left.metres else "may"
    yield (
        f"the spool {words} run out before the stop: about {grouped(max(left.metres, 0.0))} m are left, "
        f"give or take {grouped(2 * left.sd)} m, and the coil takes {grouped(outlook.wire_m)} m"
    )


def _target(recipe: Recipe, profile: MachineProfile, outlook: Outlook) -> Iterator[str]:
    if abs(outlook.wanted_turns - outlook.turns) > 1:
        yield (
            f"the target asks for about {grouped(outlook.wanted_turns)} turns, beyond the recipe's limits of "
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


def _ribbons(recipe: Recipe, wire: Wire, outlook: Outlook) -> Iterator[str]:
    found = outlook.ribbon
    if found is None or recipe.pitch_mm < _OPEN_LAY * wire.overall_mm:
        return
    ratio = f"{found.turns:.4g} turns"
    if found.q > 1:
        ratio += f", nearly {round(found.turns * found.q)}/{found.q}"
    again = "every time" if found.q == 1 else f"every {found.q} times"
    doubles = found.repeats * found.q
    lay = recipe.lay
    if lay.pitch_mm is not None:
        way_mm = found.turns * lay.pitch_mm
        other = nearest_clear(lay.pitch_mm, 4, lambda pitch: way_mm / pitch, doubles)
        spread = "" if other is None else f"; lay.pitch_mm of {other:g} mm spreads it"
    else:
        assert lay.turns_per_pass is not None  # exactly one is given
        passes = found.turns / lay.turns_per_pass
        other = nearest_clear(lay.turns_per_pass, 2, lambda turns: passes * turns, doubles)
        spread = "" if other is None else f"; lay.turns_per_pass of {other:g} spreads it"
    if spread and lay.style == "scatter":
        spread += ", and so does more of lay.amount"
    yield (
        f"ribbons: the guide's way there and back takes {ratio}: {again} the wire comes to lie on its own "
        f"path, and piles up there{spread}"
    )


def _pull(recipe: Recipe, wire: Wire) -> Iterator[str]:
    tension = recipe.tension
    if tension is None or tension.set_cn is None:
        return
    breaks_cn = 100 * BREAKS_N_PER_MM2 * wire.copper_area_mm2
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


def _speed(recipe: Recipe, profile: MachineProfile, wire: Wire, outlook: Outlook) -> Iterator[str]:
    speed, rpm = outlook.full_speed, recipe.spindle.cruise_rpm
    most = fastest_m_s(wire)
    if speed.peak_m_s > most and speed.peak_m_s > _PULSING * speed.mean_m_s:
        slower = _rounded_down(rpm * most / speed.peak_m_s)
        yield (
            f"at {rpm:g} rpm the wire runs onto the finished coil at {speed.mean_m_s:.1f} m/s and jerks to "
            f"{speed.peak_m_s:.1f} m/s twice a turn; for wire of {wire.bare_mm:.3f} mm we advise at most "
            f"{most:.1f} m/s (our judgement), a spindle.cruise_rpm of {slower}"
        )
    accel = accel_rpm_per_s(recipe, profile)
    if accel < recipe.spindle.ramp_rpm_per_s:
        yield (
            f"spindle.ramp_rpm_per_s of {recipe.spindle.ramp_rpm_per_s:g} rpm/s is more than the machine's "
            f"{accel:g} rpm/s, which it will use"
        )


def _machine(recipe: Recipe, profile: MachineProfile) -> Iterator[str]:
    if profile.by_eye:
        yield "nothing counts for this program: it goes by the turns you type, and cannot stop the machine"
    elif profile.spindle.drive == "none":
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


def _rounded_down(rpm: float) -> int:
    """To tens, and to ones below 100."""
    unit = 10 if rpm >= 100 else 1
    return max(1, int(rpm / unit) * unit)
