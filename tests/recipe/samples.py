"""A recipe's text, and ways to spoil one line of it."""

from __future__ import annotations

import re

import pytest

from windctl.errors import RecipeError
from windctl.recipe.load import parse_recipe

GOOD = """\
format = 1
name = "Sample"
[bobbin]
core_length_mm = 56
core_width_mm = 6
corner_radius_mm = 3
flange_gap_mm = 11
flange_depth_mm = 8.5
[coil]
direction_from_face = "cw"
mounted = "face out"
start_flange = "base"
[wire]
gauge = "AWG 42"
overall_mm = 0.072
[lay]
style = "scatter"
pitch_mm = 0.22
margin_mm = 0.3
pattern = "wander"
amount = 0.4
seed = 7
[spindle]
start_rpm = 150
start_turns = 20
cruise_rpm = 1000
finish_rpm = 120
finish_turns = 40
ramp_rpm_per_s = 60
[stop]
turns = 8000
tolerance_pct = 2
"""


def without(text: str, key: str) -> str:
    """The text without the line that sets this key."""
    shorter, found = re.subn(rf"^{key} = .*\n", "", text, flags=re.MULTILINE)
    assert found == 1, key
    return shorter


def replaced(text: str, key: str, lines: str) -> str:
    """The text with other lines in place of the one that sets this key."""
    other, found = re.subn(rf"^{key} = .*$", lambda _: lines, text, flags=re.MULTILINE)
    assert found == 1, key
    return other


def problems(text: str) -> list[str]:
    """What is said about a text that is no recipe, line by line."""
    with pytest.raises(RecipeError) as caught:
        parse_recipe(text, "x.toml")
    return str(caught.value).split("\n")
