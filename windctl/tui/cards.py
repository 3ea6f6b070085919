"""The card of a coil: what does not change while it is wound."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from windctl.tui.view import Card

if TYPE_CHECKING:
    from windctl.plan.model import Plan
    from windctl.recipe.tables import Stop
    from windctl.tui.recipes import Preview

_Z95 = 1.959964


def card_for(recipe: str, number: str, machine: str, plan: Plan, stop: Stop) -> Card:
    """The card of a coil with this plan."""
    return Card(
        number=number,
        recipe=recipe,
        machine=machine,
        target_kind=plan.target_kind,
        target_value=plan.target_value,
        tolerance_pct=stop.tolerance_pct,
        most_turns=plan.program.turns,
        planned_turns=float(plan.turns),
        planned_ohm=plan.dcr_20c_ohm,
        planned_u95=_Z95 * plan.dcr_sd_ohm,
        depth_mm=0.0,
    )


def card_of(preview: Preview, machine: str) -> Card:
    """A coil that is only planned."""
    card = card_for(preview.recipe.name, "", machine, preview.plan, preview.recipe.stop)
    return replace(card, depth_mm=preview.recipe.bobbin.flange_depth_mm)
