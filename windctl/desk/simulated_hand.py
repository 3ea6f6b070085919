"""Whoever stands at a machine simulated in this process, for a check-up."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from windctl.checkup.step import Act, Question

if TYPE_CHECKING:
    from windctl.machine.plant.plant import Plant

_HAND_TURNS = 10.0
_FAR = 1_000_000  # guide steps: beyond any switch


class SimulatedHand:
    """`reference_ohm`: the resistor at hand."""

    def __init__(self, plant: Plant, reference_ohm: float = 1000.0) -> None:
        self._plant = plant
        self._reference_ohm = reference_ohm

    def does(self, question: Question) -> str:
        """Does it; the answer for what is typed."""
        plant = self._plant
        match question.act:
            case Act.CONSENT:
                return "go"
            case Act.LOOK:
                return "y"
            case Act.OPEN_GUARD | Act.CLOSE_GUARD:
                plant.set_guard(closed=question.act is Act.CLOSE_GUARD)
            case Act.PRESS_STOP | Act.RELEASE_STOP:
                plant.set_stop(closed=question.act is Act.RELEASE_STOP)
            case Act.PRESS_PEDAL | Act.LET_PEDAL_GO:
                plant.press_pedal(down=question.act is Act.PRESS_PEDAL)
            case Act.PRESS_LOW | Act.PRESS_HIGH:
                plant.guide.set_to(-_FAR if question.act is Act.PRESS_LOW else _FAR)
            case Act.FREE_LOW | Act.FREE_HIGH:
                plant.guide.set_to(0)
            case Act.TURN:
                plant.turn_by_hand(_HAND_TURNS)
            case Act.LEADS_TOGETHER:
                plant.connect(0.0)
            case Act.REFERENCE:
                plant.connect(self._reference_ohm)
                return f"{self._reference_ohm:g}"
            case Act.LEADS_FREE:
                plant.connect(math.inf)
            case Act.GAUGE:
                return f"{plant.guide.next_mm():.4f}"
        return ""
