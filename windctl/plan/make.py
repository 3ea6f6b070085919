"""Recipe and machine to plan: what a coil will be, before any wire is cut."""

from __future__ import annotations

import math
from dataclasses import dataclass

from windctl.coil.buildup import BuildUp, build_per_turn_mm, resistance_ohm
from windctl.coil.fit import judge_fit
from windctl.coil.geometry import Core, core_of
from windctl.coil.wire_speed import wire_speed
from windctl.errors import PlanRefused, UsageError
from windctl.lay.deposit import Deposit, deposit
from windctl.lay.limits import check
from windctl.lay.make import make_program
from windctl.lay.program import Program
from windctl.lay.ribbons import ribbon
from windctl.material.wire import Wire
from windctl.plan.beliefs import Beliefs, beliefs_of, prior_of, resistance_sd_ohm
from windctl.plan.board_setup import board_setup
from windctl.plan.cautions import Outlook, cautions
from windctl.plan.model import Plan, TargetKind
from windctl.plan.speeds import accel_rpm_per_s, duration_s, pace_spec
from windctl.profile.model import MachineProfile
from windctl.recipe.model import Recipe
from windctl.recipe.tables import MOST_TURNS

_PROFILE_PARTS = 64  # of the gap, for drawing
_ROUNDS = 4  # of turns for a resistance and crown at those turns; each shrinks the error a hundredfold
_FINE_COUNTS = 400  # per turn
_ENOUGH_SD = 3.0  # a program for a resistance that has no max_turns covers so many standard deviations more


@dataclass(frozen=True, slots=True)
class _Basis:
    """What does not depend on the target."""

    recipe: Recipe
    profile: MachineProfile
    wire: Wire
    core: Core
    beliefs: Beliefs

    def coil(self, crown: float = 1.0) -> BuildUp:
        gap = self.recipe.bobbin.flange_gap_mm
        per_turn = build_per_turn_mm(self.wire.overall_mm, self.beliefs.packing, gap)
        return BuildUp(self.core.perimeter_mm, per_turn, crown)

    def deposited(self, program: Program, turns: float) -> Deposit:
        """The first `turns` turns of the program on the bobbin, the wire trailing its guide. A scatter slides
        off its edges; the turns of an even lay hold each other where they were laid."""
        gap = self.recipe.bobbin.flange_gap_mm
        laid = deposit(
            program,
            gap_mm=gap,
            datum_mm=self.recipe.lay.margin_mm,
            overall_mm=self.wire.overall_mm,
            lag_turns=self.profile.guide.distance_mm / self.coil().mean_turn_mm(turns),
            turns=turns,
        )
        if self.recipe.lay.style == "even":
            return laid
        return laid.settled(self.coil().build_mm(turns), gap)


def make_plan(
    recipe: Recipe, profile: MachineProfile, *, turns: int | None = None, dcr_ohm: float | None = None
) -> Plan:
    """The plan for the recipe's target, or for `turns` or `dcr_ohm` (at 20 degrees C) instead of it.

    The program covers stop.turns or stop.max_turns, so that a better forecast never changes it; with
    `turns` it covers those, with `dcr_ohm` and no stop.max_turns what the resistance may take at most.
    Raises UsageError for both targets or an impossible one, PlanRefused for what the machine cannot do.
    """
    kind, value = _target(recipe, turns, dcr_ohm)
    wire = recipe.wire_data()
    basis = _Basis(recipe, profile, wire, core_of(recipe.bobbin), beliefs_of(recipe, wire))
    covered = _program_turns(basis, kind, value)
    program = make_program(recipe, profile, turns=covered)
    checked = check(program, recipe, profile)
    board_setup(recipe, profile, program, 0)  # refuses what no board takes
    lay = program if profile.guide.kind == "step" else _lay_by_hand(recipe, profile, covered)
    planned, wanted, laid = _solve(basis, lay, kind, value)

    coil = basis.coil(laid.crown)
    sd = resistance_sd_ohm(basis.beliefs, coil, planned)
    length = coil.wire_length_m(planned)
    build = coil.build_mm(planned)
    fit = judge_fit(basis.core, build * laid.peak, basis.beliefs.build_rel, recipe.bobbin.flange_depth_mm)
    bare = wire_speed(basis.core, recipe.spindle.cruise_rpm)
    full = wire_speed(basis.core.grown(build), recipe.spindle.cruise_rpm)
    spindle = profile.spindle
    return Plan(
        recipe_name=recipe.name,
        recipe_digest=recipe.digest,
        target_kind=kind,
        target_value=value,
        turns=planned,
        turns_sd=sd / (wire.ohm_per_m * coil.metres_per_turn(planned)) if kind == "dcr_20c_ohm" else 0.0,
        dcr_20c_ohm=resistance_ohm(length, wire.ohm_per_m),
        dcr_sd_ohm=sd,
        ohm_per_m=wire.ohm_per_m,
        wire_length_m=length,
        wire_mass_g=length * wire.mass_g_per_m,
        perimeter_mm=basis.core.perimeter_mm,
        mean_turn_mm=coil.mean_turn_mm(planned),
        overall_mm=wire.overall_mm,
        packing=basis.beliefs.packing,
        packing_sd=basis.beliefs.packing_sd,
        build_mm=build,
        peak_build_mm=build * laid.peak,
        side_build_mm=fit.side_build_mm,
        crown=laid.crown,
        unevenness=laid.unevenness,
        build_profile_mm=tuple(float(part) * build for part in laid.profile(_PROFILE_PARTS)),
        fits=fit.fits,
        duration_s=duration_s(
            recipe.spindle, accel_rpm_per_s(recipe, profile), spindle.decel_rpm_per_s, float(planned)
        ),
        wire_speed_mean_m_s=bare.mean_m_s,
        wire_speed_peak_m_s=bare.peak_m_s,
        wire_speed_peak_full_m_s=full.peak_m_s,
        checked=checked,
        warnings=cautions(recipe, profile, wire, Outlook(planned, wanted, fit, full, ribbon(program))),
        prior=prior_of(basis.beliefs, coil, float(planned), profile.readings),
        pace=pace_spec(recipe, profile),
        program=program,
    )


def _target(recipe: Recipe, turns: int | None, dcr_ohm: float | None) -> tuple[TargetKind, float]:
    if turns is not None and dcr_ohm is not None:
        raise UsageError("turns and resistance are both given as the target; give one of them")
    if turns is not None:
        if not 1 <= turns <= MOST_TURNS:
            raise UsageError(f"{turns} turns are asked for; a coil has 1 to {MOST_TURNS} turns")
        return "turns", float(turns)
    if dcr_ohm is not None:
        if not (math.isfinite(dcr_ohm) and dcr_ohm > 0):
            raise UsageError(f"a resistance of {dcr_ohm:g} ohm is asked for; it must be more than 0 ohm")
        return "dcr_20c_ohm", dcr_ohm
    if recipe.stop.turns is not None:
        return "turns", float(recipe.stop.turns)
    assert recipe.stop.dcr_20c_ohm is not None  # exactly one is given
    return "dcr_20c_ohm", recipe.stop.dcr_20c_ohm


def _program_turns(basis: _Basis, kind: TargetKind, value: float) -> int:
    """How many turns the program covers."""
    if kind == "turns":
        return int(value)
    if basis.recipe.stop.max_turns is not None:
        return basis.recipe.stop.max_turns
    coil = basis.coil()
    turns = coil.turns_for_length(value / basis.wire.ohm_per_m)
    sd = resistance_sd_ohm(basis.beliefs, coil, turns)
    most = math.ceil(turns + _ENOUGH_SD * sd / (basis.wire.ohm_per_m * coil.metres_per_turn(turns)))
    if most > MOST_TURNS:
        raise PlanRefused(
            f"{value:g} ohm of this wire may take {most} turns; a coil has at most {MOST_TURNS} turns"
        )
    return most


def _solve(basis: _Basis, lay: Program, kind: TargetKind, value: float) -> tuple[int, float, Deposit]:
    """(planned turns, turns that the target asks for, their deposit). The crown depends a little on the
    turns, so turns for a resistance are found by turns, crown, turns again."""
    if kind == "turns":
        return int(value), value, basis.deposited(lay, value)
    stop = basis.recipe.stop
    least, most = stop.min_turns or 1, stop.max_turns or int(lay.turns)
    crown, wanted, planned = 1.0, 0.0, 0
    laid = None
    for _ in range(_ROUNDS):
        wanted = basis.coil(crown).turns_for_length(value / basis.wire.ohm_per_m)
        nearest = min(max(round(wanted), least), most)
        if laid is not None and nearest == planned:
            break
        planned = nearest
        laid = basis.deposited(lay, planned)
        crown = laid.crown
    assert laid is not None  # the first round makes one
    return planned, wanted, laid


def _lay_by_hand(recipe: Recipe, profile: MachineProfile, turns: int) -> Program:
    """The lay that a hand is asked for, as a fine motor would do it: for its build only."""
    steps_per_mm = _FINE_COUNTS / 4 / recipe.pitch_mm
    motor = {"kind": "step", "steps_per_mm": steps_per_mm, "backlash_mm": 0.0}
    spindle = profile.spindle.model_copy(update={"counts_per_turn": _FINE_COUNTS})
    guide = profile.guide.model_copy(update=motor)
    fine = profile.model_copy(update={"spindle": spindle, "guide": guide})
    return make_program(recipe, fine, turns=turns)
