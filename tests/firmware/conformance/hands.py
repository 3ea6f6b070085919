"""What takes a hand at the machine, and whose hand it is."""

from __future__ import annotations

import sys
from enum import Enum
from typing import Protocol, TextIO


class Act(Enum):
    """What may be asked of whoever stands at the machine."""

    OPEN_GUARD = "open the guard"
    CLOSE_GUARD = "close the guard"
    PRESS_STOP = "press the hardware stop"
    RELEASE_STOP = "release the hardware stop"
    PRESS_PEDAL = "press the pedal and keep it down"
    LET_PEDAL_GO = "let the pedal go"
    TURN_FORWARD = "turn the spindle by hand, one turn and a bit in the winding direction, then let go of it"
    TURN_BACK = "turn the spindle back by hand, half a turn, then let go of it"
    RESET = "press the board's reset button"


class Hands(Protocol):
    """Whoever stands at the machine."""

    def please(self, act: Act) -> bool:
        """Asks for it, and returns at once: whether it happened shows on the line. False: nobody can."""
        ...


class Nobody:
    """Nobody stands there."""

    def please(self, act: Act) -> bool:
        """Nobody can."""
        return False


class Somebody:
    """A person who reads what is asked, and does it; nothing is typed while a spindle may turn."""

    def __init__(self, out: TextIO | None = None) -> None:
        self._out = out or sys.stderr

    def please(self, act: Act) -> bool:
        """Says so."""
        print(
            f"    PLEASE {act.value} (within a minute; left undone, the clause is not judged)",
            file=self._out,
            flush=True,
        )
        return True
