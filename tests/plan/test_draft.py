"""Drafted recipes: good ones, whatever was answered, that a plain machine winds without a caution."""

from __future__ import annotations

import re
from dataclasses import replace
from itertools import pairwise

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from windctl.errors import RecipeError
from windctl.plan.draft import Answers, draft
from windctl.plan.make import make_plan
from windctl.profile.builtin import VIRTUAL
from windctl.recipe.load import parse_recipe

ANSWERS = Answers(
    name='Middle, the "loud" one \\ é',
    core_length_mm=56.0,
    core_width_mm=6.0,
    flange_gap_mm=11.0,
    flange_depth_mm=8.5,
    direction_from_face="ccw",
    size="AWG 42",
    overall_mm=None,
    style="scatter",
    target="turns",
    amount=8000.0,
)


def test_what_was_answered_is_what_the_recipe_says() -> None:
    recipe = parse_recipe(draft(ANSWERS))
    assert recipe.name == ANSWERS.name
    bobbin = recipe.bobbin
    assert (bobbin.core_length_mm, bobbin.core_width_mm, bobbin.corner_radius_mm) == (56, 6, 3)
    assert (bobbin.flange_gap_mm, bobbin.flange_depth_mm) == (11, 8.5)
    assert recipe.coil.direction_from_face == "ccw"
    assert (recipe.wire.gauge, recipe.wire.enamel) == ("AWG 42", "grade 1")
    assert (recipe.lay.style, recipe.stop.turns) == ("scatter", 8000)
    even = parse_recipe(draft(replace(ANSWERS, size="0,0625", overall_mm=0.0715, style="even")))
    assert (even.wire.diameter_mm, even.wire.overall_mm, even.lay.style) == (0.0625, 0.0715, "even")
    assert even.pitch_mm >= 0.0715


def test_every_line_has_its_comment() -> None:
    for answers in (ANSWERS, replace(ANSWERS, style="even", target="dcr_20c_ohm", amount=5900.0)):
        lines = draft(answers).splitlines()
        for above, line in pairwise(lines):
            if re.match(r"(# )?[a-z_0-9]+ =", line):
                assert "  # " in line or above.startswith("# "), line


@pytest.mark.parametrize("style", ["scatter", "even"])
@pytest.mark.parametrize("size", ["AWG 38", "AWG 42", "AWG 44", "0.05", "0.1"])
@pytest.mark.parametrize("length", [20.0, 56.0, 90.0])
def test_a_plain_machine_winds_the_draft_without_a_caution(style: str, size: str, length: float) -> None:
    answers = replace(ANSWERS, size=size, style=style, core_length_mm=length, amount=1500.0)
    assert make_plan(parse_recipe(draft(answers)), VIRTUAL).warnings == ()


@pytest.mark.parametrize("ohm", [400.0, 2000.0, 5900.0])
def test_a_resistance_is_met_well_within_the_turns_allowed(ohm: float) -> None:
    recipe = parse_recipe(draft(replace(ANSWERS, target="dcr_20c_ohm", amount=ohm)))
    assert recipe.stop.min_turns is not None
    assert recipe.stop.max_turns is not None
    plan = make_plan(recipe, VIRTUAL)
    assert plan.warnings == ()
    # two standard deviations of what spool and lay may do
    assert recipe.stop.min_turns <= plan.turns - 2 * plan.turns_sd
    assert plan.turns + 2 * plan.turns_sd <= recipe.stop.max_turns


mm = st.floats(0.5, 400).map(lambda x: round(x, 2))


@settings(max_examples=150)
@given(
    st.builds(
        Answers,
        name=st.text(st.characters(categories=["L", "N", "P", "S"]), min_size=1, max_size=80),
        core_length_mm=mm,
        core_width_mm=mm,
        flange_gap_mm=mm,
        flange_depth_mm=mm,
        direction_from_face=st.sampled_from(["cw", "ccw"]),
        size=st.integers(15, 50).map("AWG {}".format) | st.floats(0.02, 0.5).map(lambda d: f"{d:.3f}"),
        overall_mm=st.none() | st.floats(0.02, 1.2).map(lambda d: round(d, 3)),
        style=st.sampled_from(["scatter", "even"]),
        target=st.just("turns"),
        amount=st.integers(1, 20_000).map(float),
    )
    | st.builds(lambda ohm: replace(ANSWERS, target="dcr_20c_ohm", amount=ohm), st.floats(1, 1e6))
)
def test_any_answers_give_a_recipe_or_a_reason(answers: Answers) -> None:
    assume(answers.core_width_mm <= answers.core_length_mm)
    try:
        recipe = parse_recipe(draft(answers))
    except (ValueError, RecipeError):
        return
    assert recipe.name == answers.name
