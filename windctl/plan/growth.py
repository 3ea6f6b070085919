"""How a coil fills its bobbin, stage by stage: the program's own deposit after so many turns.

For drawing. The heights are those of the mean coil that the plan foresees; a real one packs a little denser
or looser, which the plan's interval speaks of.
"""

from __future__ import annotations

from bisect import bisect_right
from dataclasses import dataclass

from windctl.lay.deposit import deposit
from windctl.plan.model import Plan
from windctl.profile.model import MachineProfile
from windctl.recipe.model import Recipe

STAGES = 32
COLUMNS = 128


@dataclass(frozen=True, slots=True)
class Growth:
    """heights_mm[stage][column]: the build after `turns[stage]`, in equal parts of the gap from the start
    flange on. The first stage is the bare core. datum_mm: from the start flange to the guide's zero.
    """

    turns: tuple[float, ...]
    heights_mm: tuple[tuple[float, ...], ...]
    gap_mm: float
    depth_mm: float
    datum_mm: float
    start_flange: str  # "face" or "base"

    def at(self, turn: float) -> tuple[float, ...]:
        """The heights at `turn`, between stages in proportion; outside them as at the nearest."""
        after = bisect_right(self.turns, turn)
        if after == 0:
            return self.heights_mm[0]
        if after == len(self.turns):
            return self.heights_mm[-1]
        first, last = self.turns[after - 1], self.turns[after]
        share = (turn - first) / (last - first)
        return tuple(
            low + share * (high - low)
            for low, high in zip(self.heights_mm[after - 1], self.heights_mm[after], strict=True)
        )


def growth_of(recipe: Recipe, profile: MachineProfile, plan: Plan) -> Growth:
    """The stages from the bare core to the planned turns.

    Where a hand guides the wire, every stage has the shape that the plan foresees for the whole.
    """
    whole = _columns(plan.build_profile_mm)
    marks = [plan.turns * stage / STAGES for stage in range(STAGES + 1)]
    heights = [tuple(0.0 for _ in whole)]
    for turn in marks[1:]:
        if profile.guide.kind == "step":
            laid = deposit(
                plan.program,
                gap_mm=recipe.bobbin.flange_gap_mm,
                datum_mm=recipe.lay.margin_mm,
                overall_mm=plan.overall_mm,
                lag_turns=profile.guide.distance_mm / plan.mean_turn_mm,
                turns=turn,
            )
            build = plan.build_mm * turn / plan.turns
            if recipe.lay.style == "scatter":
                laid = laid.settled(build, recipe.bobbin.flange_gap_mm)
            heights.append(tuple(float(part) * build for part in laid.profile(COLUMNS)))
        else:
            heights.append(tuple(height * turn / plan.turns for height in whole))
    return Growth(
        turns=tuple(marks),
        heights_mm=tuple(heights),
        gap_mm=recipe.bobbin.flange_gap_mm,
        depth_mm=recipe.bobbin.flange_depth_mm,
        datum_mm=recipe.lay.margin_mm,
        start_flange=recipe.coil.start_flange,
    )


def _columns(profile_mm: tuple[float, ...]) -> tuple[float, ...]:
    return tuple(profile_mm[column * len(profile_mm) // COLUMNS] for column in range(COLUMNS))
