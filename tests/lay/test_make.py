"""Programs of recipes: the same bytes for ever, and refusals that say what would do."""

from __future__ import annotations

import pytest

from tests.lay.recipes import WANDER, machine, recipe
from windctl.errors import PlanRefused
from windctl.lay.make import make_program
from windctl.profile.builtin import VIRTUAL


def test_an_even_program_is_the_same_for_ever() -> None:
    """A digest that changes means that coils can no longer be wound again as their records say."""
    program = make_program(recipe(), machine(guide__backlash_mm="0.05"))
    assert program.segments == 119
    assert program.digest == "7c9f5be9c408172e75774f8a24ce022df000296db049843b3b1a7b4586f566cf"


def test_a_wandering_program_is_the_same_for_ever() -> None:
    """A digest that changes means that coils can no longer be wound again as their records say."""
    changed = recipe(WANDER, lay__reversal_spread_mm="0.15", lay__wander_turns="9.5")
    program = make_program(changed, machine(guide__backlash_mm="0.05"))
    assert program.segments == 8176
    assert program.digest == "273c7c582b02bef24b098f3f56006ecf30c9b40c8f5f94a02c9df77734f6aaa9"


@pytest.mark.parametrize(
    ("pattern", "digest"),
    [
        ("stagger", "e77356fc0831d28563ef70ba973d3c9619a5dc2cf30ba47fe0cf33b4ea7229d6"),
        ("ripple", "78025737c19489bec17aa40fef85c2bcd5a15a83364c86a293c348e5b4f53380"),
    ],
)
def test_the_other_patterns_are_the_same_for_ever(pattern: str, digest: str) -> None:
    """A digest that changes means that coils can no longer be wound again as their records say."""
    program = make_program(recipe(WANDER, lay__pattern=f'"{pattern}"'), machine(guide__backlash_mm="0.05"))
    assert program.digest == digest


def test_what_decides_the_bytes() -> None:
    base = make_program(recipe(WANDER), VIRTUAL).digest
    assert (
        make_program(recipe(WANDER, name='"another name"', stop__tolerance_pct="3.0"), VIRTUAL).digest == base
    )
    for changes in (
        {"lay__seed": "21"},
        {"lay__amount": "0.51"},
        {"lay__turns_per_pass": "42.01"},
        {"lay__margin_mm": "0.11"},
        {"stop__turns": "8001"},
    ):
        assert make_program(recipe(WANDER, **changes), VIRTUAL).digest != base
    assert make_program(recipe(WANDER), machine(guide__steps_per_mm="201")).digest != base


def test_it_covers_the_target_or_the_most_that_a_resistance_may_take() -> None:
    assert make_program(recipe(), VIRTUAL).turns == 8000
    ohm = recipe(stop__turns=None, stop__dcr_20c_ohm="5600.0", stop__min_turns="7000", stop__max_turns="8600")
    assert make_program(ohm, VIRTUAL).turns == 8600
    assert make_program(ohm, VIRTUAL, turns=100).turns == 100


def test_turns_per_pass_is_the_mean_of_a_scatter() -> None:
    program = make_program(recipe(WANDER, lay__reversal_spread_mm="0.4", stop__turns="200_000"), VIRTUAL)
    turned = (program.guide[1:] > 0) != (program.guide[:-1] > 0)
    assert 200_000 / turned.sum() == pytest.approx(42, rel=0.01)


@pytest.mark.parametrize("counts_per_turn", [1, 7, 400])
def test_a_hand_guide_only_counts(counts_per_turn: int) -> None:
    profile = machine(guide__kind='"hand"', spindle__counts_per_turn=str(counts_per_turn))
    program = make_program(recipe(stop__turns="8013"), profile)
    assert program.turns == 8013
    assert not program.guide.any()
    assert (program.counts % counts_per_turn == 0).all()


def test_a_pitch_finer_than_a_sub_step_still_moves() -> None:
    assert make_program(recipe(WANDER, lay__turns_per_pass="1_000_000.0"), VIRTUAL).turns == 8000


@pytest.mark.parametrize(
    ("changes", "says"),
    [
        (
            {"lay__turns_per_pass": None, "lay__pitch_mm": "6.0", "lay__reversal_spread_mm": "3.0"},
            r"pitch of 6 mm is more than the 4\.8 mm .* at least one turn",
        ),
        (
            {"lay__turns_per_pass": None, "lay__pitch_mm": "1.4"},
            r"one step per count; at 400 counts per turn and 200 steps/mm .* below 2 mm",
        ),
    ],
)
def test_what_cannot_be_laid_is_refused(changes: dict[str, str | None], says: str) -> None:
    with pytest.raises(PlanRefused, match=says):
        make_program(recipe(WANDER, **changes), VIRTUAL)


@pytest.mark.parametrize(
    ("steps_per_mm", "spread_mm", "says"),
    [
        ("0.5", "5.35", r"reversal_spread_mm of 5\.35 mm .* 10 mm between"),
        ("0.04", "0.0", r"travel 10\.8 mm, less than one of its steps of 25 mm; lower lay\.margin_mm"),
    ],
)
def test_steps_too_coarse_for_the_lay_are_refused(steps_per_mm: str, spread_mm: str, says: str) -> None:
    with pytest.raises(PlanRefused, match=says):
        make_program(
            recipe(WANDER, lay__reversal_spread_mm=spread_mm), machine(guide__steps_per_mm=steps_per_mm)
        )
