"""What commands, inputs and checks do to the motion: setting out, stopping, and what a stop leaves known."""

from __future__ import annotations

from typing import TYPE_CHECKING, Final

from windctl.machine.twin.rules import NO_STOP_POINT, SILENCE, STILL, still_ticks
from windctl.machine.twin.spindle import REST, RUN
from windctl.protocol.messages import TRIPS, Capability, Cause, NoticeKind, Setup, State, Trust

if TYPE_CHECKING:
    from windctl.machine.twin.board import Board

M32: Final = 0xFFFFFFFF
READY, TURNING, HELD, TRIPPED = (int(s) for s in (State.READY, State.TURNING, State.HELD, State.TRIPPED))
FITTED_DRIVE = int(Capability.DRIVE_STEP)
FITTED_GUIDE = int(Capability.GUIDE_STEP)
KNOWN: Final = int(Trust.COUNT | Trust.GUIDE)


def target(board: Board) -> int:
    """The nearest of stop point, queue end (if a guide is fitted) and hard limit; never passed."""
    setup = board.setup
    assert setup is not None  # nothing asks before a Setup
    nearest = setup.max_count
    if board.stop_point < nearest:
        nearest = board.stop_point
    if board.fitted & FITTED_GUIDE and board.line.end < nearest:
        nearest = board.line.end
    return nearest


def aim(board: Board) -> None:
    """The target may have moved: a running spindle is told."""
    if board.spindle.mode == RUN:
        board.spindle.aim(board.count, target(board))


def set_up(board: Board, setup: Setup, crc: int) -> None:
    """Take another Setup: place, program, pace and stop point are void."""
    board.setup = setup
    board.setup_crc = crc
    board.fitted = setup.fitted
    board.rotation = setup.rotation
    board.counts_per_turn = setup.counts_per_turn
    board.mean.counts_per_turn = setup.counts_per_turn
    driven = bool(setup.fitted & FITTED_DRIVE)
    board.still_ticks = still_ticks(driven, setup.counts_per_turn)
    board.slip_limit = setup.slip_counts * setup.steps_per_turn
    # 64 ticks at 5/4 of max_pace: max_pace * counts_per_turn * (64 * 5 / 4) / (1000 * steps_per_turn)
    board.over_counts = setup.max_pace * setup.counts_per_turn * 80 // (1000 * setup.steps_per_turn)
    board.spindle.configure(setup.counts_per_turn, setup.steps_per_turn, setup.accel, setup.decel)
    board.stop_point = NO_STOP_POINT
    board.trust = 0
    board.line.datum(0, board.count, 0, 0)
    board.away = 0
    board.pedal_fresh = False
    board.turns.configure(setup.counts_per_turn, board.count)


def set_datum(board: Board, program: int, count: int, guide: int, first: int, into: int) -> None:
    """The host declares where the machine stands."""
    moved = count - board.count
    board.count = count
    board.turns.move(moved)
    board.seen_count += moved
    board.guide = guide
    board.away = 0
    board.line.datum(program, count, first, into)
    board.trust = KNOWN
    board.stop_point = NO_STOP_POINT


def go(board: Board) -> None:
    """Ready or held to turning."""
    board.state = TURNING
    board.cause = Cause.NONE
    board.status_due = True
    moves(board)
    beat(board)
    board.pedal_fresh = False
    board.hand_stop_told = False
    board.went_back = 0
    board.turns.start(board.ticks, board.count)
    board.seen_count = board.count
    if board.fitted & FITTED_DRIVE:
        board.spindle.set_out(board.count, target(board))


def guide_to(board: Board, guide: int, pace: int) -> None:
    """Start to move the guide, the spindle standing."""
    board.guide_target = guide
    board.guide_pace = pace
    board.guide_ramp = 0
    beat(board)
    not_standing(board)


def hold(board: Board, cause: int) -> None:
    """Stop under control and stay powered; also ends a GuideTo. Raises the epoch in every state."""
    _raise_epoch(board)
    board.guide_pace = 0
    board.pedal_fresh = False
    if board.state == TURNING:
        board.state = HELD
        board.cause = cause
        _brake(board, at_once=False)


def enter(board: Board, state: int, cause: int) -> None:
    """Change to a state in which nothing is driven."""
    board.state = state
    board.cause = cause
    board.powered = state in (READY, HELD)
    _raise_epoch(board)


def _raise_epoch(board: Board) -> None:
    """Every permission given before is void; the host hears of it at once."""
    board.epoch = (board.epoch + 1) & 0xFFFF
    board.status_due = True


def stop_for(board: Board, trip: int) -> None:
    """Stop for a trip, by its category. A trip while tripped changes nothing, unless it removes power."""
    rule = TRIPS[trip]
    if board.state == TRIPPED and (rule.category != 0 or TRIPS[board.trip].category == 0):
        return  # already stopping; only removed power overrides that
    board.state = TRIPPED
    board.cause = Cause.TRIP
    board.trip = trip
    if not rule.count:
        board.trust &= ~Trust.COUNT
    if not rule.guide:
        board.trust &= ~Trust.GUIDE
    board.guide_pace = 0
    board.pedal_fresh = False
    _raise_epoch(board)
    board.notice(NoticeKind.TRIPPED, trip, board.count)
    if rule.category == 0:
        board.powered = False
        _brake(board, at_once=True)
    elif board.spindle.mode == REST:
        board.powered = False
    else:
        _brake(board, at_once=False)


def _brake(board: Board, at_once: bool) -> None:
    if board.spindle.mode != REST:
        if at_once:
            board.spindle.cut()
        else:
            board.spindle.brake()
        if board.spindle.mode == REST:
            rests(board)


def rests(board: Board) -> None:
    """No more steps are issued; the spindle stands when counts have stayed away for a while."""
    moves(board)
    board.off_at = (board.ticks + STILL) & M32


def moves(board: Board) -> None:
    """The spindle moves, or may be about to."""
    board.spindle_moves = True
    not_standing(board)


def not_standing(board: Board) -> None:
    """Spindle or guide moves: everything stands at the earliest `still_ticks` from now."""
    board.standing = False
    board.still_at = (board.ticks + board.still_ticks) & M32


def arrived(board: Board) -> None:
    """The last step before the target is out."""
    goal = board.spindle.goal
    setup = board.setup
    assert setup is not None
    if goal == board.stop_point:
        board.settled_cause = Cause.STOP_POINT
    elif goal == setup.max_count:
        board.settled_cause = Cause.MAX_COUNT
    else:
        board.settled_cause = Cause.QUEUE_END
    rests(board)


def beat(board: Board) -> None:
    """The host is alive: silence is counted from now."""
    board.silent_at = (board.ticks + SILENCE) & M32
