"""Who stands at the virtual machine and does what takes a hand; never what a board or a host decides."""

from __future__ import annotations

from windctl.machine.plant.plant import Plant
from windctl.machine.twin import motion
from windctl.machine.twin.board import Board
from windctl.protocol.messages import Capability, State

LOOKS_EVERY = 50  # ticks
_REACTION_LOOKS = 6  # 300 ms until a person has let go of their own motor
_SLOW_FROM_TURNS = 30.0  # a person slows down when the counter comes near the stop point
_SLOW_RPM = 60.0
_FOOT_LOOKS = 8  # 400 ms from seeing the drives powered to having the foot on the pedal


class Attendant:
    """Puts on an empty bobbin for a new coil, puts right what tripped, turns what no board drives, and stands
    on the pedal from when the drives are powered until the spindle is held or done."""

    __slots__ = ("_board", "_foot_in", "_looks_past_stop", "_plant", "_state")

    def __init__(self, board: Board, plant: Plant) -> None:
        self._board = board
        self._plant = plant
        self._state = int(board.state)
        self._looks_past_stop = 0
        self._foot_in = 0  # looks until it comes down

    def see(self, state: int) -> None:
        """The board has come to another state."""
        before, self._state = self._state, state
        plant = self._plant
        if state == State.READY and self._board.count == 0 and plant.truth().true_turns >= 1.0:
            plant.new_bobbin(self._board.guide)
        if state == State.DRIVES_OFF and (before == State.TRIPPED or not plant.wire_whole):
            plant.put_right()
        if state == State.READY:
            self._foot_in = _FOOT_LOOKS
        elif state != State.TURNING:
            self._foot_in = 0
            plant.press_pedal(down=False)

    def look(self) -> None:
        """Every LOOKS_EVERY ticks."""
        if not self._plant.spec.drive:
            self._turn_by_motor()
        if self._foot_in and self._board.fitted & Capability.PEDAL:
            self._foot_in -= 1
            if not self._foot_in:
                self._plant.press_pedal(down=True)

    def _turn_by_motor(self) -> None:
        """Where no board drives the spindle: a person's own motor, by eye."""
        board, plant = self._board, self._plant
        left = 0.0
        if board.state == State.TURNING:
            left = (motion.target(board) - board.count) / plant.spec.counts_per_turn
        if left > 0.0:
            self._looks_past_stop = 0
            cruise = plant.spec.cruise_rpm
            plant.own_motor(cruise if left > _SLOW_FROM_TURNS else min(_SLOW_RPM, cruise))
        elif self._looks_past_stop < _REACTION_LOOKS:
            self._looks_past_stop += 1
        else:
            plant.own_motor(0.0)
