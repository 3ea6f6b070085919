"""The recipe of a rewind: a good recipe, whose plan is the coil that was measured."""

from __future__ import annotations

from dataclasses import replace

import pytest

from tests.shop.test_unknown_coil import GRAMS, OHM, TURNS, WORKED
from windctl.plan.make import make_plan
from windctl.profile.builtin import VIRTUAL
from windctl.recipe.load import parse_recipe
from windctl.recipe.tables import Bobbin
from windctl.shop.rewind import Rewind, recipe_text
from windctl.shop.unknown_coil import identify

BOBBIN = Bobbin(
    core_length_mm=56.0, core_width_mm=6.0, corner_radius_mm=3.0, flange_gap_mm=11.0, flange_depth_mm=8.0
)


def test_its_plan_is_the_measured_coil() -> None:
    found = identify(replace(WORKED, grams=GRAMS), style="scatter")
    recipe = parse_recipe(recipe_text(found, Rewind("Rewind, demo", BOBBIN)))
    plan = make_plan(recipe, VIRTUAL)
    assert recipe.wire.gauge == "AWG 42"
    assert recipe.stop.dcr_20c_ohm == pytest.approx(OHM, abs=0.06)
    assert plan.dcr_20c_ohm == pytest.approx(OHM, rel=1e-3)
    assert plan.turns == pytest.approx(TURNS, rel=0.03)
    assert plan.wire_mass_g == pytest.approx(GRAMS, rel=0.03)
    assert recipe.stop.min_turns is not None
    assert recipe.stop.max_turns is not None
    assert recipe.stop.min_turns < found.turns.low < found.turns.high < recipe.stop.max_turns


@pytest.mark.parametrize("style", ["scatter", "even"])
def test_any_finding_makes_a_good_recipe(style: str) -> None:
    found = identify(WORKED, style=style)  # type: ignore[arg-type]  # one of the two
    text = recipe_text(found, Rewind("Rewind, demo", BOBBIN))
    recipe = parse_recipe(text)
    assert recipe.lay.style == style
    assert recipe.lay.packing is not None
    assert text.startswith("# A rewind, estimated")
    assert found.sizes[0].name in text


def test_a_micrometer_s_reading_goes_into_the_recipe() -> None:
    found = identify(replace(WORKED, overall_mm=0.0725), sizes="metric")
    recipe = parse_recipe(recipe_text(found, Rewind("Rewind, demo", BOBBIN)))
    assert recipe.wire.overall_mm == 0.0725
    assert recipe.wire.diameter_mm == 0.063
