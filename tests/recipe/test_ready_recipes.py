"""The ready recipes load, fit their bobbins, and are explained to the last key."""

from __future__ import annotations

import math
import re
from itertools import pairwise
from pathlib import Path

import pytest

from windctl.lay.ribbons import ribbon
from windctl.material.gauge import METRIC
from windctl.plan.make import make_plan
from windctl.profile.builtin import VIRTUAL
from windctl.profile.load import load_profile
from windctl.profile.model import MachineProfile
from windctl.recipe.load import load_recipe
from windctl.recipe.model import Recipe

ROOT = Path(__file__).parents[2]
FOLDER = ROOT / "recipes"
FILES = sorted(FOLDER.glob("*.toml"))
MACHINES = sorted((FOLDER / "machines").glob("*.toml"))

# What plan says about a machine rather than about a recipe.
_OF_THE_MACHINE = ("no spindle drive", "the wire is guided by hand", "no tension sensor")


def _machines_of(file: Path) -> list[MachineProfile]:
    """The profiles that a recipe's comment names, the one it is meant for first."""
    (line,) = (line for line in file.read_text().splitlines() if line.startswith("# Machine: "))
    named = [load_profile(ROOT / name) for name in re.findall(r"recipes/machines/[a-z-]+\.toml", line)]
    return named + [VIRTUAL] * (" virtual" in line)


def _build_mm(recipe: Recipe, turns: int) -> float:
    """Mean build, mm: turns * wire area / (packing * gap), with a packing that is cautious for either lay:
    random loose packing of disks is about 0.66 (Brouwers, Soft Matter 2023), and scattered wire crosses."""
    packing = 0.60 if recipe.lay.style == "scatter" else 0.70
    return turns * recipe.wire_data().overall_area_mm2 / (packing * recipe.bobbin.flange_gap_mm)


def _core_mm(recipe: Recipe) -> float:
    bobbin = recipe.bobbin
    return 2 * (bobbin.core_length_mm + bobbin.core_width_mm) - (8 - 2 * math.pi) * bobbin.corner_radius_mm


def test_the_folder_holds_what_a_shop_starts_with() -> None:
    names = {file.name for file in FILES}
    assert names >= {
        "bridge-single-to-resistance.toml",
        "bridge-single-to-turns.toml",
        "hum-pair-north.toml",
        "hum-pair-south.toml",
        "bass-single-even.toml",
        "bass-single-scatter.toml",
        "neck-single-by-hand.toml",
        "bridge-single-with-checks.toml",
    }
    assert {file.name for file in MACHINES} == {
        "guided-live.toml",
        "guided-checks.toml",
        "hand-guided.toml",
        "counter-only.toml",
        "counter-read.toml",
    }


@pytest.mark.parametrize("file", FILES, ids=lambda file: file.stem)
def test_it_winds_without_a_caution_on_every_machine_that_it_names(file: Path) -> None:
    """A caution that a ready recipe raises is one that nobody reads."""
    recipe = load_recipe(file)
    machines = _machines_of(file)
    assert machines
    for profile in machines:
        plan = make_plan(recipe, profile)
        assert plan.fits == "yes"
        assert [said for said in plan.warnings if not said.startswith(_OF_THE_MACHINE)] == []
        assert recipe.lay.style == "even" or ribbon(plan.program) is None


def test_there_is_a_recipe_for_every_kind_of_machine() -> None:
    wants = {file.stem: _machines_of(file)[0] for file in FILES}
    assert wants["neck-single-by-hand"].guide.kind == "hand"
    assert wants["bridge-single-with-checks"].readings.mode == "checks"
    assert {profile.readings.mode for profile in wants.values()} == {"live", "checks", "none"}
    assert {load_profile(file).spindle.drive for file in MACHINES} == {"step", "none"}
    assert load_recipe(FOLDER / "bass-single-even.toml").lay.style == "even"
    patterns = {load_recipe(file).lay.pattern for file in FILES}
    assert patterns >= {"wander", "stagger", "ripple"}


@pytest.mark.parametrize("file", FILES, ids=lambda file: file.stem)
def test_it_fits_between_its_flanges(file: Path) -> None:
    """A long side bulges by up to a quarter, and the lay is a tenth higher where it is densest (common
    practice, no source)."""
    recipe = load_recipe(file)
    assert _build_mm(recipe, recipe.program_turns) * 1.25 * 1.1 < recipe.bobbin.flange_depth_mm


@pytest.mark.parametrize("file", FILES, ids=lambda file: file.stem)
def test_it_is_gentle_with_guide_and_wire(file: Path) -> None:
    """At a turn-round the guide's speed jumps by twice pitch times revolutions per second; a machine with
    every default takes 10 mm/s. Wire: at most a fifth of what breaks copper at 220 MPa (from memory)."""
    recipe = load_recipe(file)
    assert 2 * recipe.pitch_mm * recipe.spindle.cruise_rpm / 60 < 10.0
    assert recipe.tension is not None
    assert recipe.tension.set_cn is not None
    assert recipe.tension.set_cn / 100 <= 0.2 * 220 * recipe.wire_data().copper_area_mm2


@pytest.mark.parametrize("file", [*FILES, *MACHINES], ids=lambda file: file.stem)
def test_it_is_marked_as_a_demo_and_every_key_is_explained(file: Path) -> None:
    loaded = load_profile(file) if file in MACHINES else load_recipe(file)
    assert "(demo)" in loaded.name
    lines = file.read_text().splitlines()
    assert any(line.startswith("# DEMO: ") for line in lines)
    assert any(line.startswith("# Use th") for line in lines)  # when to use it
    for above, line in pairwise(lines):
        if re.match(r"[a-z_0-9]+ = ", line):
            assert "  # " in line or above.startswith("# "), line


def test_the_resistance_target_lies_within_its_limits_whatever_the_spool() -> None:
    """The spool may be anywhere in the metric standard's range for this size (IEC 60317-0-1, 0.063 mm: 5.045
    to 5.922 ohm/m): also then the target is met between min_turns and max_turns, with packing 0.63."""
    recipe = load_recipe(FOLDER / "bridge-single-to-resistance.toml")
    (row,) = [size for size in METRIC if size.bare_mm == 0.063]
    wire, bobbin, stop = recipe.wire_data(), recipe.bobbin, recipe.stop
    growth_mm = wire.overall_area_mm2 / (0.63 * bobbin.flange_gap_mm)

    def ohm(turns: int, ohm_per_m: float) -> float:
        length_m = (_core_mm(recipe) * turns + math.pi * growth_mm * turns**2) / 1000
        return length_m * ohm_per_m

    assert stop.dcr_20c_ohm is not None
    assert stop.min_turns is not None
    assert stop.max_turns is not None
    assert ohm(stop.min_turns, row.ohm_per_m_max) < stop.dcr_20c_ohm < ohm(stop.max_turns, row.ohm_per_m_min)
    assert ohm(8000, wire.ohm_per_m) == pytest.approx(stop.dcr_20c_ohm, rel=0.01)


def test_the_hum_pair_differs_in_direction_and_magnet_alone() -> None:
    """Common practice, no source: opposite magnets and opposite windings add signals and cancel hum."""
    north = load_recipe(FOLDER / "hum-pair-north.toml")
    south = load_recipe(FOLDER / "hum-pair-south.toml")
    assert (north.coil.magnet_up, south.coil.magnet_up) == ("north", "south")
    assert {north.coil.direction_from_face, south.coil.direction_from_face} == {"cw", "ccw"}
    assert north.orientation.spindle != south.orientation.spindle
    same = {"name": "", "coil": north.coil}
    assert north.model_copy(update=same) == south.model_copy(update=same)
