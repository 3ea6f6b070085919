"""What the board does with each numbered command. Every check is here; what passes is done by the Board.

The order of the checks is part of the protocol: type, boot and epoch, state, then the rest as written below.
A verdict is (refusal, limit), or (ACCEPTED, value).
"""

from __future__ import annotations

from binascii import crc_hqx
from collections.abc import Callable
from typing import TYPE_CHECKING, Any, Final

from windctl.machine.twin import motion, rules
from windctl.machine.twin.contact_mean import WINDOW_LIMIT
from windctl.machine.twin.signals import GUARD_OK, GUIDE_HIGH_OK, GUIDE_LOW_OK, PEDAL_DOWN, STOP_OK
from windctl.machine.twin.spindle import BRAKE, RUN, SETTLE
from windctl.protocol import messages as m
from windctl.protocol.frames import CRC_START
from windctl.protocol.messages import Capability, Cause, Refusal, State

if TYPE_CHECKING:
    from windctl.machine.twin.board import Board

ACCEPTED: Final = 0
Verdict = tuple[int, int]
DONE: Final[Verdict] = (ACCEPTED, 0)


def judge(board: Board, code: int, body: bytes) -> Verdict:
    """Do a numbered command that is due, or say why not."""
    legal = rules.LEGAL.get(code)
    if legal is None:
        return Refusal.UNKNOWN_TYPE, 0
    command: Any = m.decode(code, body)
    if command.MOVES and (command.boot != board.boot or command.epoch != board.epoch):
        return Refusal.STALE, board.epoch
    if not legal >> board.state & 1:
        return Refusal.STATE, board.state
    return HANDLERS[code](board, command)


# ---------------------------------------------------------------- one function per command


def _setup(board: Board, setup: m.Setup) -> Verdict:
    crc = crc_hqx(setup.encode_body(), CRC_START)
    if board.setup == setup:
        return DONE  # already so; place and program stay
    if setup.fitted & ~(board.capabilities & rules.FITTABLE):
        return Refusal.NOT_FITTED, board.capabilities & rules.FITTABLE
    for value, low, high in (
        (setup.counts_per_turn, 1, rules.COUNTS_PER_TURN_LIMIT),
        (setup.steps_per_turn, 1, rules.STEPS_PER_TURN_LIMIT),
        (setup.max_count, 1, rules.COUNT_LIMIT),
        (setup.max_pace, 1, rules.PACE_LIMIT),
        (setup.accel, rules.RATE_MIN, 0xFFFF),
        (setup.decel, rules.RATE_MIN, 0xFFFF),
        (setup.max_pace, 1, rules.STANDS_WITHIN * setup.decel),
        (setup.guide_max, setup.guide_min, 0x7FFFFFFF),
        (setup.tension_high, setup.tension_low, 0xFFFF),
        (setup.rotation, 0, 1),
    ):
        if value < low:
            return Refusal.RANGE, low
        if value > high:
            return Refusal.RANGE, high
    motion.set_up(board, setup, crc)
    return DONE


def _arm(board: Board, _: m.Arm) -> Verdict:
    if board.setup is None:
        return Refusal.NO_SETUP, 0
    if not board.standing:
        return Refusal.MOVING, 0
    if _inputs_open(board):
        return Refusal.INPUT_OPEN, board.pins
    if board.fitted & Capability.PEDAL and board.pins & PEDAL_DOWN:
        return Refusal.PEDAL_DOWN, 0
    motion.enter(board, State.READY, Cause.ARM)
    return DONE


def _disarm(board: Board, _: m.Disarm) -> Verdict:
    if not board.standing:
        return Refusal.MOVING, 0
    motion.enter(board, State.DRIVES_OFF, Cause.DISARM)
    return DONE


def _lay(board: Board, lay: m.Lay) -> Verdict:
    line = board.line
    if not board.fitted & Capability.GUIDE_STEP:
        return Refusal.NOT_FITTED, 0
    if lay.program != line.program:
        return Refusal.PROGRAM, 0
    if lay.first != line.next:
        return Refusal.GAP, _as_i32(line.next)
    if not 1 <= lay.n <= m.SEGMENTS_PER_LAY:
        return Refusal.RANGE, m.SEGMENTS_PER_LAY
    if lay.n > line.free:
        return Refusal.QUEUE_FULL, line.free
    bad = line.bad_segment(lay.n, lay.segments)
    if bad >= 0:
        return Refusal.SEGMENT, bad
    if line.end + line.length(lay.n, lay.segments) > rules.COUNT_LIMIT:
        return Refusal.RANGE, rules.COUNT_LIMIT
    line.append(lay.n, lay.segments)
    motion.aim(board)
    return DONE


def _pace(board: Board, pace: m.Pace) -> Verdict:
    setup = board.setup
    assert setup is not None  # every state this is legal in follows a Setup
    if pace.pace < 1:
        return Refusal.RANGE, 1
    if pace.pace > setup.max_pace:
        return Refusal.RANGE, setup.max_pace
    board.spindle.set_pace(pace.pace)
    return DONE


def _stop_at(board: Board, stop: m.StopAt) -> Verdict:
    setup = board.setup
    assert setup is not None
    count = stop.count
    if count == rules.NO_STOP_POINT:
        board.stop_point = count
        motion.aim(board)
        return ACCEPTED, motion.target(board)
    if count > setup.max_count:
        return Refusal.RANGE, setup.max_count
    if board.spindle.mode in (RUN, BRAKE):
        nearest = board.spindle.nearest_stand(board.count)
        if count < nearest:  # brake now; where it already had to stand is reachable by construction
            count = max(count, min(nearest, board.spindle.goal))
    elif count < board.count:
        if board.state != State.TURNING:
            return Refusal.RANGE, board.count
        count = board.count if board.count > 0 else 0
    board.stop_point = count
    motion.aim(board)
    return ACCEPTED, board.spindle.goal if board.spindle.mode == SETTLE else motion.target(board)


def _go(board: Board, _: m.Go) -> Verdict:
    if not board.standing:
        return Refusal.MOVING, 0
    if board.trust != m.Trust.COUNT | m.Trust.GUIDE:
        return Refusal.NO_DATUM, board.trust
    if _inputs_open(board):
        return Refusal.INPUT_OPEN, board.pins
    if board.fitted & Capability.PEDAL:
        if not board.pins & PEDAL_DOWN:
            return Refusal.PEDAL_UP, 0
        if not board.pedal_fresh:
            return Refusal.PEDAL_DOWN, 0
    if board.away:
        return Refusal.RANGE, board.guide - board.away
    target = motion.target(board)
    if board.fitted & Capability.DRIVE_STEP:
        if board.spindle.pace == 0:
            return Refusal.RANGE, 1
        if board.spindle.steps_to(board.count, target) == 0:
            return Refusal.RANGE, target
    elif target <= board.count:
        return Refusal.RANGE, target
    motion.go(board)
    return DONE


def _guide_to(board: Board, to: m.GuideTo) -> Verdict:
    setup = board.setup
    assert setup is not None
    if not board.fitted & Capability.GUIDE_STEP:
        return Refusal.NOT_FITTED, 0
    if not board.standing:
        return Refusal.MOVING, 0
    if to.guide < setup.guide_min:
        return Refusal.RANGE, setup.guide_min
    if to.guide > setup.guide_max:
        return Refusal.RANGE, setup.guide_max
    if to.pace < 1:
        return Refusal.RANGE, 1
    if to.pace > rules.GUIDE_PACE_LIMIT:
        return Refusal.RANGE, rules.GUIDE_PACE_LIMIT
    motion.guide_to(board, to.guide, to.pace)
    return DONE


def _set_datum(board: Board, datum: m.SetDatum) -> Verdict:
    setup = board.setup
    if setup is None:
        return Refusal.NO_SETUP, 0
    if not board.standing:
        return Refusal.MOVING, 0
    if datum.count > rules.COUNT_LIMIT:
        return Refusal.RANGE, rules.COUNT_LIMIT
    if datum.count < -rules.COUNT_LIMIT:
        return Refusal.RANGE, -rules.COUNT_LIMIT
    if board.fitted & Capability.GUIDE_STEP:
        if datum.guide < setup.guide_min:
            return Refusal.RANGE, setup.guide_min
        if datum.guide > setup.guide_max:
            return Refusal.RANGE, setup.guide_max
    motion.set_datum(board, datum.program, datum.count, datum.guide, datum.next, datum.into)
    return DONE


def _measure(board: Board, measure: m.Measure) -> Verdict:
    if not board.capabilities & Capability.CONTACT:
        return Refusal.NOT_FITTED, 0
    if measure.window > WINDOW_LIMIT or measure.window % 100:
        return Refusal.RANGE, WINDOW_LIMIT
    board.mean.start(measure.window, measure.every, board.ticks, board.count, board.spindle_moves)
    return DONE


def _clear_trip(board: Board, _: m.ClearTrip) -> Verdict:
    if board.powered or not board.standing:
        return Refusal.MOVING, 0
    if _inputs_open(board):
        return Refusal.INPUT_OPEN, board.pins
    board.trip = m.Trip.NONE
    motion.enter(board, State.DRIVES_OFF, Cause.TRIP)
    return DONE


HANDLERS: Final[dict[int, Callable[[Board, Any], Verdict]]] = {
    m.Setup.CODE: _setup,
    m.Arm.CODE: _arm,
    m.Disarm.CODE: _disarm,
    m.Lay.CODE: _lay,
    m.Pace.CODE: _pace,
    m.StopAt.CODE: _stop_at,
    m.Go.CODE: _go,
    m.GuideTo.CODE: _guide_to,
    m.SetDatum.CODE: _set_datum,
    m.Measure.CODE: _measure,
    m.ClearTrip.CODE: _clear_trip,
}


def _inputs_open(board: Board) -> bool:
    needed = STOP_OK | GUARD_OK
    if board.fitted & Capability.GUIDE_STEP:
        needed |= GUIDE_LOW_OK | GUIDE_HIGH_OK
    return board.pins & needed != needed


def _as_i32(value: int) -> int:
    return value - (1 << 32) if value & 0x80000000 else value
