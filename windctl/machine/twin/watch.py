"""What the board watches for: inputs that change, turns that pass, and checks of its own motion.

Each function is called in the tick in which its occasion comes; none is part of a quiet tick.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

from windctl.machine.twin import motion
from windctl.machine.twin.rules import CHECK_EVERY, PEDAL_DEBOUNCE
from windctl.machine.twin.signals import GUARD_OK, GUIDE_HIGH_OK, GUIDE_LOW_OK, PEDAL_DOWN, STOP_OK
from windctl.machine.twin.spindle import REST, RUN
from windctl.protocol.messages import Capability, Cause, NoticeKind, State, Trip

if TYPE_CHECKING:
    from windctl.machine.twin.board import Board

GUIDE_OK: Final = GUIDE_LOW_OK | GUIDE_HIGH_OK
M32: Final = 0xFFFFFFFF


def silence(board: Board) -> None:
    """Two seconds without a Beat: whatever moves stops, and the host must greet anew."""
    if board.state == State.TURNING or board.guide_pace:
        motion.hold(board, Cause.SILENCE)
        board.state = State.HELD
        board.cause = Cause.SILENCE
        board.dialogue.greeted = False


def counted(board: Board, counted: int) -> None:
    """Counts that are not just one more bit of a forward turn."""
    if counted < 0:
        if board.state == State.TURNING:
            board.went_back -= counted
            setup = board.setup
            assert setup is not None
            if board.went_back > setup.reverse_counts:
                motion.stop_for(board, Trip.REVERSE)
        board.turns.back(board.count)
    else:
        if board.went_back:
            board.went_back = board.went_back - counted if board.went_back > counted else 0
        if board.count >= board.turns.end:
            turn_passed(board)
    if board.spindle.mode != RUN:
        motion.moves(board)


def turn_passed(board: Board) -> None:
    turns = board.turns
    whole = turns.passed(board.ticks, board.count)
    setup = board.setup
    if whole and board.state == State.TURNING and board.fitted & Capability.TENSION and setup is not None:
        if turns.tension < setup.tension_low:
            motion.stop_for(board, Trip.TENSION_LOW)
        elif turns.tension > setup.tension_high:
            motion.stop_for(board, Trip.TENSION_HIGH)


def index_seen(board: Board, counted: int) -> None:
    off = board.turns.index(board.count, counted)
    setup = board.setup
    watched = board.state == State.TURNING and board.fitted & Capability.INDEX
    if watched and setup is not None and off > setup.slip_counts + abs(counted):
        motion.stop_for(board, Trip.INDEX)


def pins_changed(board: Board, pins: int) -> None:
    changed = pins ^ board.pins
    board.pins = pins
    if board.powered:
        if not pins & STOP_OK:
            motion.stop_for(board, Trip.STOP_INPUT)
        elif not pins & GUARD_OK:
            motion.stop_for(board, Trip.GUARD)
        elif board.fitted & Capability.GUIDE_STEP and pins & GUIDE_OK != GUIDE_OK:
            motion.stop_for(board, Trip.GUIDE_LIMIT)
    if changed & PEDAL_DOWN and board.fitted & Capability.PEDAL:
        board.pedal_fresh = False
        if pins & PEDAL_DOWN:
            board.pedal_at = (board.ticks + PEDAL_DEBOUNCE) & M32
        elif board.state == State.TURNING:
            motion.hold(board, Cause.PEDAL)


def pedal_pressed(board: Board) -> None:
    if (
        board.pins & PEDAL_DOWN
        and board.fitted & Capability.PEDAL
        and board.state in (State.READY, State.HELD)
    ):
        board.pedal_fresh = True
        board.notice(NoticeKind.PEDAL_ASKS, 0, 0)


def check(board: Board) -> None:
    """Every 64 ticks: measured speed, slip, a missing index, and whether this is a state at all."""
    board.check_at = (board.check_at + CHECK_EVERY) & M32
    counts = board.count - board.seen_count
    board.seen_count = board.count
    speed = counts * 125 // 8 if counts > 0 else 0
    board.speed = speed if speed < 0xFFFF else 0xFFFF
    if not State.DRIVES_OFF <= board.state <= State.TRIPPED:
        motion.stop_for(board, Trip.INTERNAL)
    setup = board.setup
    if setup is None:
        return
    spindle = board.spindle
    if spindle.mode != REST:
        if abs(spindle.check(board.count)) > board.slip_limit:
            motion.stop_for(board, Trip.SLIP)
        if counts > board.over_counts + 1:
            motion.stop_for(board, Trip.OVERSPEED)
        motion.aim(board)
    if board.state == State.TURNING and board.fitted & Capability.INDEX:
        longest = board.counts_per_turn + board.counts_per_turn // 2 + setup.slip_counts
        if board.turns.since_index(board.count) > longest:
            motion.stop_for(board, Trip.INDEX)
