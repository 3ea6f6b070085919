"""Hands at a simulated machine: they reach into the plant."""

from __future__ import annotations

from collections.abc import Callable

from tests.firmware.conformance.hands import Act
from windctl.machine.plant.plant import Plant


class PlantHands:
    """Does at once what is asked. `reset` restarts the board."""

    def __init__(self, plant: Plant, reset: Callable[[], None]) -> None:
        self._plant = plant
        self._reset = reset

    def please(self, act: Act) -> bool:
        """Does it."""
        plant = self._plant
        match act:
            case Act.OPEN_GUARD | Act.CLOSE_GUARD:
                plant.set_guard(closed=act is Act.CLOSE_GUARD)
            case Act.PRESS_STOP | Act.RELEASE_STOP:
                plant.set_stop(closed=act is Act.RELEASE_STOP)
            case Act.PRESS_PEDAL | Act.LET_PEDAL_GO:
                plant.press_pedal(down=act is Act.PRESS_PEDAL)
            case Act.TURN_FORWARD:
                plant.turn_by_hand(1.1)
            case Act.TURN_BACK:
                plant.turn_by_hand(-0.5)
            case Act.RESET:
                self._reset()
        return True
