"""A recipe's program on a machine: the same recipe, seed and profile, the same bytes on every computer."""

from __future__ import annotations

import numpy as np

from windctl.errors import PlanRefused
from windctl.lay.fold import segments_of
from windctl.lay.patterns import PATTERNS
from windctl.lay.program import MOST_COUNTS, Program
from windctl.lay.spec import LaySpec, spec_of
from windctl.profile.model import MachineProfile
from windctl.recipe.model import Recipe

_HAND_TURNS = 50  # of one segment where a hand guides: they only count


def make_program(recipe: Recipe, profile: MachineProfile, *, turns: int | None = None) -> Program:
    """The program for `turns`, else for the recipe's target turns or, with a resistance target, its
    max_turns.

    Raises PlanRefused where the machine cannot follow it; `windctl.lay.limits` judges speeds and travel.
    """
    covered = recipe.program_turns if turns is None else turns
    if profile.guide.kind == "hand":
        return hand_program(covered, profile.spindle.counts_per_turn, profile.guide.steps_per_mm)
    spec = spec_of(recipe, profile, covered)
    return program_of(spec, profile.guide.steps_per_mm)


def program_of(spec: LaySpec, steps_per_mm: float) -> Program:
    """The program of a lay in integers."""
    counts, guide = segments_of(spec, PATTERNS[spec.pattern](spec))
    over = np.flatnonzero((np.abs(guide) > counts) | (counts < 1))
    if len(over):
        worst = over[np.argmax(np.abs(guide[over]) / np.maximum(counts[over], 1))]
        raise PlanRefused(
            f"the guide would make {abs(int(guide[worst]))} steps in {int(counts[worst])} counts, more than "
            f"one step per count; at {spec.counts_per_turn} counts per turn and {steps_per_mm:g} steps/mm "
            f"the pitch, wherever it wanders, must stay below {spec.counts_per_turn / steps_per_mm:.4g} mm; "
            "choose a finer pitch, or a spindle with more counts per turn"
        )
    return Program(
        counts.astype(np.uint16),
        guide.astype(np.int16),
        spec.counts_per_turn,
        steps_per_mm,
        backlash_steps=spec.backlash,
    )


def hand_program(turns: int, counts_per_turn: int, steps_per_mm: float) -> Program:
    """Counts only, for a guide moved by hand: the stop point and the queue work as with a motor."""
    longest = counts_per_turn * max(1, min(_HAND_TURNS, MOST_COUNTS // counts_per_turn))
    total = turns * counts_per_turn
    whole, rest = divmod(total, longest)
    counts = np.array([longest] * whole + [rest] * (rest > 0), dtype=np.uint16)
    return Program(counts, np.zeros(len(counts), dtype=np.int16), counts_per_turn, steps_per_mm)
