"""A recipe that would make the like of an unknown coil: a rewind job."""

from __future__ import annotations

import math
from dataclasses import dataclass

from windctl.plan.draft import Answers, draft
from windctl.recipe.tables import Bobbin
from windctl.shop.unknown_coil import Findings

_SPOOL = 0.08  # by how much another spool's ohm per metre may ask for more turns, or fewer
_LIKELY = 0.01  # candidates that are named beside the likeliest


@dataclass(frozen=True, slots=True)
class Rewind:
    """What a recipe needs beyond what was found: its name and the bobbin."""

    name: str
    bobbin: Bobbin


def recipe_text(findings: Findings, rewind: Rewind) -> str:
    """The text of a recipe with the likeliest wire, wound to the resistance that was measured, within the
    turns that were found. Raises ValueError where such a recipe cannot be."""
    best, bobbin, turns = findings.best, rewind.bobbin, findings.turns
    packing, ohm = best.fit.packing(), best.fit.ohm_per_m()
    others = [
        f"{size.name} ({100 * size.probability:.0f} %)"
        for size in findings.sizes
        if size.probability > _LIKELY
    ]
    heading = (
        "A rewind, estimated from what could be measured outside: see that the wire is the right one first.\n"
        f"Wire: {', '.join(others)}. Turns: {turns.value:.0f} ({turns.low:.0f} to {turns.high:.0f}).\n"
        "Ohm per metre is the old wire's: measure the new spool, or plan and wind with --spool.\n"
        "Direction and start flange could not be measured: set [coil] as the old coil was."
    )
    return draft(
        Answers(
            name=rewind.name,
            core_length_mm=bobbin.core_length_mm,
            core_width_mm=bobbin.core_width_mm,
            flange_gap_mm=bobbin.flange_gap_mm,
            flange_depth_mm=bobbin.flange_depth_mm,
            direction_from_face="cw",
            size=best.size.removesuffix(" mm"),
            overall_mm=None if findings.outside.overall_mm is None else findings.outside.overall_mm,
            style=best.fit.style,
            target="dcr_20c_ohm",
            amount=round(findings.outside.ohm_20c, 1),
            grade=best.enamel,
            corner_radius_mm=bobbin.corner_radius_mm,
            core_perimeter_mm=bobbin.core_perimeter_mm,
            packing=(math.exp(packing.mean), math.exp(packing.mean) * packing.sd),
            ohm_per_m=(math.exp(ohm.mean), math.exp(ohm.mean) * ohm.sd),
            turns=(max(math.floor(turns.low * (1 - _SPOOL)), 1), math.ceil(turns.high * (1 + _SPOOL))),
            heading=heading,
        )
    )
