"""What a coil picks up, from its own record alone: the same record gives the same page, whatever else the
shop has learnt since."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from windctl.record.addenda import Addendum, CoilTaught

if TYPE_CHECKING:
    from windctl.coil.geometry import Core


@dataclass(frozen=True, slots=True)
class Hum:
    """Turns times mean area, m2, and its relative standard deviation."""

    turns_area_m2: float
    rel: float


def hum_of(core: Core | None, addenda: Sequence[Addendum]) -> Hum | None:
    """Of a finished coil; None where its record has taught nothing, or has no core that can be read."""
    from windctl.plan.experience.fold import Experience
    from windctl.shop.enclosed import Known, enclosed

    lessons = [fact.lesson for fact in addenda if isinstance(fact, CoilTaught)]
    if core is None or not lessons or not lessons[-1].turns > 0:
        return None
    lesson = lessons[-1]
    told = enclosed([Known(core, lesson)], [lesson], Experience())
    return Hum(told.turns_area_m2(0), told.rel(0))
