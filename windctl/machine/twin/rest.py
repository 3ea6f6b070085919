"""Ticks in which no spindle step is issued, and what the guide does in them."""

from __future__ import annotations

from typing import TYPE_CHECKING

from windctl.machine.twin import motion, watch
from windctl.machine.twin.spindle import REST, SETTLE
from windctl.protocol.messages import Capability, Cause, NoticeKind, State, Trip

if TYPE_CHECKING:
    from windctl.machine.twin.board import Board

DRIVE = int(Capability.DRIVE_STEP)
GUIDE = int(Capability.GUIDE_STEP)
TURNING = int(State.TURNING)
TRIPPED = int(State.TRIPPED)


def at_rest(board: Board, counted: int) -> int:
    """Spindle at rest, settling or turned by hand. Returns guide steps."""
    ticks = board.ticks
    steps = 0
    if board.powered and board.fitted & GUIDE:
        if counted:
            board.line.wait(counted)
        if board.guide_pace:
            steps = _guide_to(board)
        elif board.line.lagging and board.trip != Trip.GUIDE_LIMIT:
            steps = board.line.catch_up()
            motion.not_standing(board)
    elif counted and board.fitted & GUIDE:
        board.line.wait(counted)
    if not board.standing and ticks == board.still_at:
        _came_to_rest(board)
    if board.state == TRIPPED and board.powered and ticks == board.off_at:
        board.powered = False
        board.status_due = True
    if ticks == board.pedal_at:
        watch.pedal_pressed(board)
    by_hand = board.state == TURNING and not board.fitted & DRIVE
    if by_hand and not board.hand_stop_told and board.count >= motion.target(board):
        board.hand_stop_told = True
        board.notice(NoticeKind.HAND_STOP_DUE, board.count, 0)
    return steps


def _came_to_rest(board: Board) -> None:
    if board.spindle.mode == SETTLE and board.spindle.creep(board.count):
        return
    board.spindle.mode = REST
    board.standing = True
    board.spindle_moves = False
    board.status_due = True
    if board.state == TURNING:
        if board.fitted & DRIVE:
            motion.enter(board, State.HELD, board.settled_cause)
        elif board.hand_stop_told:
            at_stop_point = board.stop_point <= board.count
            motion.enter(board, State.HELD, Cause.STOP_POINT if at_stop_point else Cause.MAX_COUNT)
    board.notice(NoticeKind.STANDING, board.count, board.guide)


def _guide_to(board: Board) -> int:
    ramp = board.guide_ramp + board.guide_pace
    steps = 0
    while ramp >= 1000:
        ramp -= 1000
        if board.guide + steps < board.guide_target:
            steps += 1
        elif board.guide + steps > board.guide_target:
            steps -= 1
    board.guide_ramp = ramp
    board.away += steps
    if board.guide + steps == board.guide_target:
        board.guide_pace = 0
    motion.not_standing(board)
    return steps


def guide_moved(board: Board, steps: int) -> int:
    """Steps that may be issued: none if they would leave the limits."""
    setup = board.setup
    assert setup is not None
    guide = board.guide + steps
    if (steps > 0 and guide > setup.guide_max) or (steps < 0 and guide < setup.guide_min):
        board.away -= steps
        motion.stop_for(board, Trip.GUIDE_LIMIT)
        return 0
    board.guide = guide
    return steps
