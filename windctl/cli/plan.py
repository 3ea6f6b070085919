"""`windctl plan`: what a coil will be, before any wire is cut."""

from __future__ import annotations

import os
import sys
from pathlib import Path
from typing import TYPE_CHECKING

import click

from windctl.cli import present, typed
from windctl.cli.forecast import show_check
from windctl.cli.options import Shared, takes
from windctl.cli.section import Pen, Section, drawn
from windctl.desk.machines import profile_of

if TYPE_CHECKING:
    from windctl.forecast.checking import Check
    from windctl.plan.model import Plan
    from windctl.recipe.model import Recipe

_Z95 = 1.959964  # two-sided 95 % of a normal distribution


@click.command(short_help="What a coil will be.")
@click.argument("recipe", type=click.Path(path_type=Path))
@click.option(
    "--turns", type=typed.WholeRange(min=1), metavar="N", help="Plan this many turns, whatever the target."
)
@click.option(
    "--dcr",
    "dcr_ohm",
    callback=typed.ohm_option,
    metavar="OHM",
    help="Plan for this resistance at 20 °C, whatever the target; 7.946k and 7,946k are understood.",
)
@takes("machine", "readings", "spool", "book", "json", "no_input")
def plan(shared: Shared, recipe: Path, turns: int | None, dcr_ohm: float | None) -> None:
    """What the coil of RECIPE will be: turns, resistance, wire, fit, time, and what can go wrong.

    ± is half of the 95 % interval, here and wherever windctl writes it.
    """
    from windctl.desk.supply import supply_of
    from windctl.plan.make import make_plan
    from windctl.recipe.load import load_recipe

    if turns is not None and dcr_ohm is not None:
        raise click.UsageError("--turns and --dcr each name the target: give one of them.")
    wanted, profile = load_recipe(recipe), profile_of(shared)
    supply = supply_of(shared, profile, wanted)
    if dcr_ohm is not None:
        expected = make_plan(wanted, profile, supply=supply).dcr_20c_ohm
        dcr_ohm = typed.confirm_ohm(dcr_ohm, expected, "a target", may_ask=typed.may_ask(shared.no_input))
    made = make_plan(wanted, profile, turns=turns, dcr_ohm=dcr_ohm, supply=supply)
    check = _check(made, wanted) if profile.readings.mode == "checks" else None
    if shared.json:
        present.result_json({**made.as_json(), "check": None if check is None else check.as_json()})
    else:
        show_plan(made, wanted)
        if check is not None:
            present.result(show_check(check))


def _check(made: Plan, recipe: Recipe) -> Check | None:
    """Where a coil for a resistance would first be read."""
    from windctl.forecast.checking import where_to_check
    from windctl.forecast.estimator import begin

    if made.target_kind == "turns":
        return None
    most = float(recipe.stop.max_turns or made.program.turns)
    least = float(recipe.stop.min_turns or 1)
    return where_to_check(begin(made.prior), 0.0, made.target_value, least, most)


def show_plan(made: Plan, recipe: Recipe) -> None:
    """The plan as a table for people, and its section; ± is the half-width of the 95 % interval."""
    resistance = present.ohm(made.dcr_20c_ohm, _Z95 * made.dcr_sd_ohm)
    if made.target_kind == "dcr_20c_ohm":
        at_target = f"{present.ohm(made.target_value)} at 20 °C, the target"
        resistance = f"{at_target}; {resistance} if it stopped at turn {present.grouped(made.turns)}"
    else:
        resistance = f"{resistance} at 20 °C"
    build = _millimetres(made.build_mm, made.build_sd_mm)
    highest = f"{made.peak_build_mm:.1f} mm at its highest (unevenness {100 * made.unevenness:.0f} %)"
    peak = f"{made.wire_speed_peak_m_s:.1f} m/s twice a turn"
    segments = present.grouped(made.program.segments)
    present.result(made.recipe_name)
    present.pairs(
        [
            ("turns", present.turns(made.turns, _Z95 * made.turns_sd)),
            ("resistance", resistance),
            ("wire", f"{present.grouped(made.wire_length_m, 1)} m, {made.wire_mass_g:.1f} g"),
            ("mean turn", f"{made.mean_turn_mm:.1f} mm"),
            ("build", f"{build}, {highest}"),
            ("fits", made.fits),
            ("time", present.duration(made.duration_s)),
            ("wire speed", f"{made.wire_speed_mean_m_s:.1f} m/s, {peak}"),
            ("program", f"{segments} segments, {present.short_digest(made.program.digest)}"),
            *_learnt(made),
        ]
    )
    _show_section(made, recipe)
    for warning in made.warnings:
        present.result(f"caution: {warning}")


def _millimetres(value: float, sd: float) -> str:
    return present.with_uncertainty(value, _Z95 * sd, "mm", most_decimals=1)


def _learnt(made: Plan) -> list[tuple[str, str]]:
    """What the plan rests on besides recipe and tables."""
    from windctl.plan.experience.reel import coils_left

    learnt = made.learnt
    rows = []
    if learnt.spool:
        per_m = f"{made.ohm_per_m:.4g} ohm/m"
        coils = learnt.spool_coils
        known = f"known from {present.counted(coils, 'coil')}" if coils else "no coil from it has taught yet"
        rows.append(("spool", f"{learnt.spool}, {per_m}, {known}"))
        if learnt.left is not None:
            left = present.with_uncertainty(max(learnt.left.metres, 0.0), _Z95 * learnt.left.sd, "m")
            such = present.counted(coils_left(learnt.left, made.wire_length_m), "such coil")
            rows.append(("left on it", f"{left}, enough for {such}"))
    if learnt.lay_coils:
        packing = f"{made.packing:.3f} ± {_Z95 * made.packing_sd:.3f}"
        rows.append(
            ("packing", f"{packing}, known from {present.counted(learnt.lay_coils, 'coil')} of this lay")
        )
    return rows


def _show_section(made: Plan, recipe: Recipe) -> None:
    bulge = made.side_build_mm / made.peak_build_mm
    heights = [height * bulge for height in made.build_profile_mm]
    bobbin = recipe.bobbin
    section = Section(heights, bobbin.flange_gap_mm, bobbin.flange_depth_mm, recipe.coil.start_flange)
    present.result()
    for line in drawn(section, Pen.of(sys.stdout, os.environ)):
        present.result(line)
    present.result(
        "section through a long side, where the winding stands highest: "
        f"{_millimetres(made.side_build_mm, made.side_build_sd_mm)} of {bobbin.flange_depth_mm:g} mm"
    )
    present.result()
