"""A recipe's lay on a machine, in integers: everything that decides the program's bytes."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

from windctl.errors import PlanRefused
from windctl.lay.fixed import SUB, exact, nearest, sub_steps, whole_steps
from windctl.profile.model import Guide, MachineProfile
from windctl.recipe.model import Recipe
from windctl.recipe.tables import Lay

# A hand changes its pace within about a dozen turns. Our judgement; lay.wander_turns beats it.
WANDER_TURNS = 12.0

# Turn-rounds take up the play over at least one turn, and so slowly that the extra speed is at most this
# part of what the guide may jump.
_TAKE_UP_TURNS = 1
_TAKE_UP_SHARE = Fraction(1, 4)


@dataclass(frozen=True, slots=True)
class LaySpec:
    """Lengths in guide steps or in sub-steps (1/65536 step), fractions in 1/65536."""

    pattern: str  # "even", or one of a scatter's
    turns: int
    counts_per_turn: int
    stroke: int  # whole steps between the turn-round points
    pitch: int  # sub-steps per turn, the mean of a scatter
    amount: int = 0  # of 65536
    seed: int = 0
    spread: int = 0  # whole steps: each turn-round point lies up to this far inside the stroke
    wander_turns: Fraction = Fraction(WANDER_TURNS)
    backlash: int = 0  # whole steps
    take_up: int = 0  # counts over which a turn-round's play is taken up

    @property
    def total_counts(self) -> int:
        """Counts that the program covers."""
        return self.turns * self.counts_per_turn


def spec_of(recipe: Recipe, profile: MachineProfile, turns: int) -> LaySpec:
    """The lay's integers. Raises PlanRefused where the turn-round points leave no way between them."""
    lay, guide = recipe.lay, profile.guide
    per_mm = exact(guide.steps_per_mm)
    gap, margin = exact(recipe.bobbin.flange_gap_mm), exact(lay.margin_mm)
    stroke = whole_steps(gap - 2 * margin, per_mm)
    if stroke < 1:
        raise PlanRefused(
            f"between its turn-round points the guide would travel {float(gap - 2 * margin):g} mm, less than "
            f"one of its steps of {float(1 / per_mm):g} mm; lower lay.margin_mm or use a finer guide"
        )
    spread = whole_steps(exact(lay.reversal_spread_mm or 0.0), per_mm)
    if 2 * spread >= stroke:
        raise PlanRefused(
            f"lay.reversal_spread_mm of {lay.reversal_spread_mm:g} mm on each side uses up the "
            f"{stroke / float(per_mm):g} mm between the turn-round points; less than half of that"
        )
    pitch = _pitch(lay, per_mm, stroke - spread)
    if pitch > (stroke - 2 * spread) * SUB:
        raise PlanRefused(
            f"a pitch of {pitch / SUB / float(per_mm):.4g} mm is more than the "
            f"{(stroke - 2 * spread) / float(per_mm):.4g} mm between the turn-round points; "
            "a pass takes at least one turn"
        )
    backlash = whole_steps(exact(guide.backlash_mm), per_mm)
    return LaySpec(
        pattern=lay.pattern or "even",
        turns=turns,
        counts_per_turn=profile.spindle.counts_per_turn,
        stroke=stroke,
        pitch=pitch,
        amount=nearest(exact(lay.amount or 0.0) * 65536),
        seed=lay.seed or 0,
        spread=spread,
        wander_turns=exact(WANDER_TURNS if lay.wander_turns is None else lay.wander_turns),
        backlash=backlash,
        take_up=_take_up(backlash, guide, profile.spindle.counts_per_turn, recipe.spindle.cruise_rpm),
    )


def _pitch(lay: Lay, per_mm: Fraction, mean_pass: int) -> int:
    """Sub-steps per turn: as given, or the mean pass (steps; each turn-round lies half the spread inside on
    average) over its turns. At least one sub-step."""
    if lay.pitch_mm is not None:
        return max(1, sub_steps(exact(lay.pitch_mm), per_mm))
    assert lay.turns_per_pass is not None  # exactly one is given
    return max(1, nearest(Fraction(mean_pass * SUB) / exact(lay.turns_per_pass)))


def _take_up(backlash: int, guide: Guide, counts_per_turn: int, rpm: float) -> int:
    """Counts over which `backlash` steps are made so that they add little speed at `rpm`."""
    if backlash == 0:
        return 0
    extra_mm_per_s = _TAKE_UP_SHARE * exact(guide.start_stop_mm_per_s)
    seconds = exact(guide.backlash_mm) / extra_mm_per_s
    counts = seconds * exact(rpm) / 60 * counts_per_turn
    return max(_TAKE_UP_TURNS * counts_per_turn, nearest(counts), backlash)
