"""Where a hand should be: a way there and back, reckoned by hand."""

from __future__ import annotations

from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.plan.by_hand import HandLay, hand_lay
from windctl.recipe.load import parse_recipe

RECIPES = Path(__file__).resolve().parents[2] / "recipes"
LAY = HandLay(gap_mm=10.4, margin_mm=0.2, pass_turns=60.0, start_flange="base")


@pytest.mark.parametrize(
    ("turn", "mm", "outward", "left", "towards"),
    [
        (0.0, 0.2, True, 60.0, "face"),
        (15.0, 2.7, True, 45.0, "face"),
        (59.0, 0.2 + 10 * 59 / 60, True, 1.0, "face"),
        (60.0, 10.2, False, 60.0, "base"),
        (90.0, 5.2, False, 30.0, "base"),
        (120.0, 0.2, True, 60.0, "face"),
        (615.0, 2.7, True, 45.0, "face"),
    ],
)
def test_there_and_back_ten_millimetres_in_sixty_turns(
    turn: float, mm: float, outward: bool, left: float, towards: str
) -> None:
    place = LAY.at(turn)
    assert place.mm == pytest.approx(mm)
    assert (place.outward, place.towards) == (outward, towards)
    assert place.turns_left == pytest.approx(left)


@given(st.floats(0.0, 1e5))
def test_it_stays_inside_the_margins_and_moves_by_the_pitch(turn: float) -> None:
    place, then = LAY.at(turn), LAY.at(turn + 0.1)
    assert 0.2 - 1e-9 <= place.mm <= 10.2 + 1e-9
    assert abs(then.mm - place.mm) <= 0.1 * 10.0 / 60.0 + 1e-6
    assert 0.0 < place.turns_left <= 60.0


def test_a_recipe_says_its_turns_for_a_pass_or_its_pitch() -> None:
    text = (RECIPES / "neck-single-by-hand.toml").read_text(encoding="utf-8")
    lay = hand_lay(parse_recipe(text, "a"))
    assert (lay.gap_mm, lay.margin_mm, lay.start_flange) == (10.5, 0.2, "base")
    assert lay.pass_turns == pytest.approx(60.0)
    by_pitch = text.replace("turns_per_pass = 60", "pitch_mm = 0.2")
    assert hand_lay(parse_recipe(by_pitch, "b")).pass_turns == pytest.approx(10.1 / 0.2)
