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
from windctl.material.wire import Wire, mass_g_per_m
from windctl.plan.beliefs import Beliefs, Believed, basis_of, beliefs_of
from windctl.plan.board_setup import board_setup
from windctl.plan.cautions import Outlook, cautions
from windctl.plan.experience.lesson import Lesson
from windctl.plan.experience.outlook import outlook
from windctl.plan.experience.supply import UNKNOWN, Supply
from windctl.plan.experience.unknowns import meter_rel
from windctl.plan.model import Learnt, Plan, TargetKind
from windctl.plan.speeds import accel_rpm_per_s, duration_s, pace_spec
from windctl.profile.model import MachineProfile
from windctl.recipe.model import Recipe
from windctl.recipe.tables import MOST_TURNS

_PROFILE_PARTS = 64  # of the gap, for drawing
_ROUNDS = 4  # of turns for a resistance and crown at those turns; each shrinks the error a hundredfold
_FINE_COUNTS = 400  # per turn
_ENOUGH_SD = 3.0  # a program for a resistance that has no max_turns covers so many standard deviations more


@dataclass(frozen=True, slots=True)
class _Given:
    """What does not depend on the target."""

    recipe: Recipe
    profile: MachineProfile
    supply: Supply
    wire: Wire
    core: Core
    beliefs: Beliefs

    def believed(self, turns: float, crown: float = 1.0) -> Believed:
        """A coil of so many turns, laid with this crown: what the tables say, corrected by experience."""
        readings = self.profile.readings
        gap = self.recipe.bobbin.flange_gap_mm
        per_turn = build_per_turn_mm(self.wire.overall_mm, self.beliefs.packing, gap)
        nominal = BuildUp(self.core.perimeter_mm, per_turn, crown)
        basis = basis_of(self.recipe, self.wire, self.core, self.beliefs, nominal)
        common = meter_rel(readings.gain_sd_pct / 100, readings.celsius_sd, readings.coil_over_air_sd_k)
        ahead = Lesson("", self.profile.bench, self.supply.id, basis, turns, common, ())
        return Believed(basis, outlook(self.supply.experience, ahead))

    def coil(self, turns: float, crown: float = 1.0) -> BuildUp:
        return self.believed(turns, crown).coil

    def deposited(self, program: Program, turns: float) -> Deposit:
        """The first `turns` turns of the program on the bobbin, the wire trailing its guide. A scatter slides
        off its edges; the turns of an even lay hold each other where they were laid."""
        gap = self.recipe.bobbin.flange_gap_mm
        coil = self.coil(turns)
        laid = deposit(
            program,
            gap_mm=gap,
            datum_mm=self.recipe.lay.margin_mm,
            overall_mm=self.wire.overall_mm,
            lag_turns=self.profile.guide.distance_mm / coil.mean_turn_mm(turns),
            turns=turns,
        )
        if self.recipe.lay.style == "even":
            return laid
        return laid.settled(coil.build_mm(turns), gap)


def make_plan(
    recipe: Recipe,
    profile: MachineProfile,
    *,
    turns: int | None = None,
    dcr_ohm: float | None = None,
    supply: Supply = UNKNOWN,
) -> Plan:
    """The plan for the recipe's target, or for `turns` or `dcr_ohm` (at 20 degrees C) instead of it.

    `supply`: the spool that the wire comes from and what the shop's coils have taught.

    The program covers stop.turns or stop.max_turns, so that a better forecast never changes it; with
    `turns` it covers those, with `dcr_ohm` and no stop.max_turns what the resistance may take at most.
    Raises UsageError for both targets, an impossible one or another wire than the spool's, PlanRefused for
    what the machine cannot do.
    """
    kind, value = _target(recipe, turns, dcr_ohm)
    wire = supply.wire_for(recipe)
    beliefs = beliefs_of(recipe, wire, spool_known=supply.spool is not None)
    given = _Given(recipe, profile, supply, wire, core_of(recipe.bobbin), beliefs)
    covered = _program_turns(given, kind, value)
    program = make_program(recipe, profile, turns=covered)
    checked = check(program, recipe, profile)
    board_setup(recipe, profile, program, 0)  # refuses what no board takes
    lay = program if profile.guide.kind == "step" else _lay_by_hand(recipe, profile, covered)
    planned, wanted, laid = _solve(given, lay, kind, value)

    believed = given.believed(planned, laid.crown)
    coil, ohm_per_m, known = believed.coil, believed.ohm_per_m, believed.outlook
    sd = believed.resistance_sd_ohm(planned)
    packing = beliefs.packing * math.exp(known.packing.mean)
    length = coil.wire_length_m(planned)
    build = coil.build_mm(planned)
    build_rel = given.believed(planned).build_rel  # a crown that slides makes no higher peak
    fit = judge_fit(given.core, build * laid.peak, build_rel, recipe.bobbin.flange_depth_mm)
    bare = wire_speed(given.core, recipe.spindle.cruise_rpm)
    full = wire_speed(given.core.grown(build), recipe.spindle.cruise_rpm)
    ahead = Outlook(planned, wanted, fit, full, ribbon(program), length, supply.left)
    spindle = profile.spindle
    return Plan(
        recipe_name=recipe.name,
        recipe_digest=recipe.digest,
        target_kind=kind,
        target_value=value,
        turns=planned,
        turns_sd=sd / (ohm_per_m * coil.metres_per_turn(planned)) if kind == "dcr_20c_ohm" else 0.0,
        dcr_20c_ohm=resistance_ohm(length, ohm_per_m),
        dcr_sd_ohm=sd,
        ohm_per_m=ohm_per_m,
        wire_length_m=length,
        wire_mass_g=length * mass_g_per_m(*believed.basis.wire_sizes(known.wire)),
        perimeter_mm=coil.perimeter_mm,
        mean_turn_mm=coil.mean_turn_mm(planned),
        overall_mm=wire.overall_mm,
        packing=packing,
        packing_sd=min(beliefs.packing_sd, packing * known.packing.sd),  # the latter has the crown in it
        build_mm=build,
        build_sd_mm=build * build_rel,
        peak_build_mm=build * laid.peak,
        side_build_mm=fit.side_build_mm,
        side_build_sd_mm=fit.side_sd_mm,
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
        warnings=cautions(recipe, profile, wire, ahead),
        prior=believed.prior(float(planned), profile.readings),
        basis=believed.basis,
        learnt=Learnt(supply.id, known.spool_coils, known.lay_coils, supply.left),
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


def _program_turns(given: _Given, kind: TargetKind, value: float) -> int:
    """How many turns the program covers."""
    if kind == "turns":
        return int(value)
    if given.recipe.stop.max_turns is not None:
        return given.recipe.stop.max_turns
    believed = _believed_for(given, value)
    coil = believed.coil
    turns = coil.turns_for_length(value / believed.ohm_per_m)
    sd = believed.resistance_sd_ohm(turns)
    most = math.ceil(turns + _ENOUGH_SD * sd / (believed.ohm_per_m * coil.metres_per_turn(turns)))
    if most > MOST_TURNS:
        raise PlanRefused(
            f"{value:g} ohm of this wire may take {most} turns; a coil has at most {MOST_TURNS} turns"
        )
    return most


def _solve(given: _Given, lay: Program, kind: TargetKind, value: float) -> tuple[int, float, Deposit]:
    """(planned turns, turns that the target asks for, their deposit). The crown depends a little on the
    turns, so turns for a resistance are found by turns, crown, turns again."""
    if kind == "turns":
        return int(value), value, given.deposited(lay, value)
    stop = given.recipe.stop
    least, most = stop.min_turns or 1, stop.max_turns or int(lay.turns)
    crown, wanted, planned = 1.0, 0.0, 0
    laid = None
    for _ in range(_ROUNDS):
        believed = _believed_for(given, value, crown)
        wanted = believed.coil.turns_for_length(value / believed.ohm_per_m)
        nearest = min(max(round(wanted), least), most)
        if laid is not None and nearest == planned:
            break
        planned = nearest
        laid = given.deposited(lay, planned)
        crown = laid.crown
    assert laid is not None  # the first round makes one
    return planned, wanted, laid


def _believed_for(given: _Given, ohm: float, crown: float = 1.0) -> Believed:
    """A coil of this resistance: about as many turns decide how much of the spool it takes."""
    nominal = given.believed(1.0, crown).basis
    return given.believed(nominal.coil.turns_for_length(ohm / nominal.ohm_per_m), crown)


def _lay_by_hand(recipe: Recipe, profile: MachineProfile, turns: int) -> Program:
    """The lay that a hand is asked for, as a fine motor would do it: for its build only."""
    steps_per_mm = _FINE_COUNTS / 4 / recipe.pitch_mm
    motor = {"kind": "step", "steps_per_mm": steps_per_mm, "backlash_mm": 0.0}
    spindle = profile.spindle.model_copy(update={"counts_per_turn": _FINE_COUNTS})
    guide = profile.guide.model_copy(update=motor)
    fine = profile.model_copy(update={"spindle": spindle, "guide": guide})
    return make_program(recipe, fine, turns=turns)
