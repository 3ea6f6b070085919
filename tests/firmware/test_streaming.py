"""The line keeps the queue filled beyond the braking distance, faster than anybody winds."""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path

import pytest

from tests.conftest import LONG
from tests.firmware.chip import CYCLES_PER_TICK
from tests.firmware.streaming import Planned, densest, stream
from windctl.plan.board_setup import board_setup
from windctl.profile.builtin import VIRTUAL
from windctl.profile.model import MAX_STEP_HZ

Elf = Callable[..., Path]

MARGIN = 1.5  # of the recipe's own cruise


@pytest.fixture(scope="module")
def planned() -> Planned:
    return densest()


def test_the_densest_program_streams_at_the_highest_pace_there_is(chip: Elf, planned: Planned) -> None:
    """15 000 steps/s are all that a board may put out, so no pace beyond it has to be tried."""
    recipe, plan = planned
    seconds = 30.0 if LONG else 2.0
    seen = stream(chip(), planned, MAX_STEP_HZ, seconds)
    rpm = MAX_STEP_HZ * 60 / VIRTUAL.spindle.steps_per_turn
    decel = board_setup(recipe, VIRTUAL, plan.program, 1).decel
    by_queue = math.sqrt(MAX_STEP_HZ**2 + 2 * decel * seen.spare) * 60 / VIRTUAL.spindle.steps_per_turn
    print(
        f"{recipe.name}: {plan.program.segments / plan.program.turns:.2f} segments a turn; {rpm:.0f} rpm is "
        f"{rpm / recipe.spindle.cruise_rpm:.2f} times its cruise; at least {seen.spare} counts beyond the "
        f"braking distance, enough for {by_queue:.0f} rpm; {seen.line:.1%} of the line to the board; worst "
        f"tick {seen.worst_busy / CYCLES_PER_TICK:.3f} ms; {seen.reports} reports, {seen.slower} slower"
    )
    assert seen.slower == 0
    assert seen.spare > 0
    assert seen.worst_busy < 0.9 * CYCLES_PER_TICK
    assert rpm >= MARGIN * recipe.spindle.cruise_rpm
