"""Where a hand that guides the wire should be: from flange to flange and back, evenly, at the recipe's pitch.

Even, whatever the recipe's pattern: a hand scatters by itself, and cannot follow a scatter.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import floor

from windctl.recipe.model import Recipe


@dataclass(frozen=True, slots=True)
class HandPlace:
    """Where the hand should be. `mm` from the start flange; `outward`: it moves away from that flange;
    `turns_left` until it turns round, near the flange called `towards`."""

    mm: float
    outward: bool
    turns_left: float
    towards: str


@dataclass(frozen=True, slots=True)
class HandLay:
    """A way there and back: it starts `margin_mm` inside the start flange and takes `pass_turns` each way."""

    gap_mm: float
    margin_mm: float
    pass_turns: float
    start_flange: str  # "face" or "base"

    def at(self, turn: float) -> HandPlace:
        """The place after `turn` turns."""
        passes = max(turn, 0.0) / self.pass_turns
        number = floor(passes)
        part = passes - number
        outward = number % 2 == 0
        way = part if outward else 1.0 - part
        other = "base" if self.start_flange == "face" else "face"
        return HandPlace(
            mm=self.margin_mm + way * (self.gap_mm - 2.0 * self.margin_mm),
            outward=outward,
            turns_left=(1.0 - part) * self.pass_turns,
            towards=other if outward else self.start_flange,
        )


def hand_lay(recipe: Recipe) -> HandLay:
    """What a recipe asks of a hand."""
    return HandLay(
        gap_mm=recipe.bobbin.flange_gap_mm,
        margin_mm=recipe.lay.margin_mm,
        pass_turns=recipe.stroke_mm / recipe.pitch_mm,
        start_flange=recipe.coil.start_flange,
    )
