"""Whatever bytes a file holds, its loader gives what it is for or its own error, never anything else; and a
recipe that loads gives a plan or a refusal. In the long form each holds over 10 000 files."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from hypothesis import given, settings

from tests.forms.spoiling import anything, spoilt
from tests.forms.test_positions import agrees_with_other_parsers
from tests.forms.toml_documents import documents
from tests.recipe.samples import GOOD
from windctl.errors import FileInvalid, PlanRefused, ProfileError, ReadingsError, RecipeError
from windctl.forecast.readings_file import parse_readings
from windctl.forms.source import text_of
from windctl.plan.make import make_plan
from windctl.profile.builtin import VIRTUAL
from windctl.profile.load import parse_profile
from windctl.profile.model import MachineProfile
from windctl.recipe.load import parse_recipe
from windctl.recipe.model import Recipe

RECIPE = (GOOD + "[tension]\nset_cn = 12 # pull\nband_cn = 5\n").encode()
PROFILE = b"""\
format = 1
name = "north"
bench = "n1" # prefix
pedal = true
[port]
url = "/dev/ttyUSB0"
[spindle]
drive = "step"
counts_per_turn = 400
max_rpm = 1200
[guide]
kind = "step"
steps_per_mm = 200
backlash_mm = 0.05
[readings]
mode = "live"
gain_sd_pct = 0.2
"""
READINGS = b"turn,ohm,celsius,sd_ohm,state,event\n500,342.1,22.5,,rest,\n1000,0.69k,22.6,1,turning,splice\n"

MANY = settings(max_examples=10_000)
LONG_TIME = pytest.mark.timeout(3600)


def loads_or_says(
    content: bytes, parse: Callable[[str], object], kind: object, error: type[FileInvalid]
) -> object:
    """What was loaded, or None where the loader said, with places, what is wrong."""
    try:
        loaded = parse(text_of(content, "f", error))
    except error as refused:
        assert type(refused) is error
        assert refused.problems
        lines = content.count(b"\n") + content.count(b"\r") + 1
        for problem in refused.problems:
            assert problem.text
            assert str(problem).isprintable()
            assert 0 <= problem.line <= lines
            assert (problem.line == 0) == (problem.column == 0)
        return None
    assert isinstance(loaded, kind)  # type: ignore[arg-type]  # a class
    return loaded


def recipe_holds(content: bytes) -> None:
    loads_or_says(content, lambda text: parse_recipe(text, "f"), Recipe, RecipeError)


def profile_holds(content: bytes) -> None:
    loads_or_says(content, lambda text: parse_profile(text, "f"), MachineProfile, ProfileError)


def readings_hold(content: bytes) -> None:
    loads_or_says(content, lambda text: parse_readings(text, "f"), list, ReadingsError)


def plan_holds(content: bytes) -> None:
    """A recipe that loads is planned or refused with words. Coils of more turns than anybody winds are let
    be: they only take time."""
    loaded = loads_or_says(content, lambda text: parse_recipe(text, "f"), Recipe, RecipeError)
    if isinstance(loaded, Recipe) and loaded.program_turns <= 20_000:
        try:
            plan = make_plan(loaded, VIRTUAL)
        except PlanRefused as refused:
            assert str(refused).isprintable() or "\n" in str(refused)
        else:
            assert plan.dcr_20c_ohm > 0
            assert plan.as_json()["format"] == 1


@given(anything(RECIPE))
def test_any_bytes_are_a_recipe_or_the_error(content: bytes) -> None:
    recipe_holds(content)


@given(anything(PROFILE))
def test_any_bytes_are_a_profile_or_the_error(content: bytes) -> None:
    profile_holds(content)


@given(anything(READINGS))
def test_any_bytes_are_readings_or_the_error(content: bytes) -> None:
    readings_hold(content)


@given(spoilt(RECIPE))
def test_a_recipe_that_loads_is_planned_or_refused(content: bytes) -> None:
    plan_holds(content)


@pytest.mark.long
@LONG_TIME
@MANY
@given(anything(RECIPE))
def test_ten_thousand_recipes(content: bytes) -> None:
    recipe_holds(content)


@pytest.mark.long
@LONG_TIME
@MANY
@given(anything(PROFILE))
def test_ten_thousand_profiles(content: bytes) -> None:
    profile_holds(content)


@pytest.mark.long
@LONG_TIME
@MANY
@given(anything(READINGS))
def test_ten_thousand_readings_files(content: bytes) -> None:
    readings_hold(content)


@pytest.mark.long
@LONG_TIME
@MANY
@given(spoilt(RECIPE))
def test_ten_thousand_plans(content: bytes) -> None:
    plan_holds(content)


@pytest.mark.long
@LONG_TIME
@MANY
@given(documents())
def test_positions_of_ten_thousand_documents(text: str) -> None:
    agrees_with_other_parsers(text)
