"""The board's literal tables and timing figures, as firmware_protocol/README.md states them."""

from __future__ import annotations

from typing import Final

from windctl.protocol import messages as m
from windctl.protocol.messages import State

# ---------------------------------------------------------------- figures; times in ticks of 1 ms

STATUS_EVERY: Final = 50
CHECK_EVERY: Final = 64  # speed, slip, missing index
SILENCE: Final = 2000  # without a Beat while something moves
STILL: Final = (
    50  # without movement until "standing"; longer on a board that counts coarsely, see still_ticks
)
STILL_COARSE: Final = 2000
PEDAL_DEBOUNCE: Final = 20
SENT_MAX: Final = 192  # bytes the core puts out in one tick at most

NO_STOP_POINT: Final = 0xFFFFFFFF
COUNT_LIMIT: Final = 1 << 30  # no count is ever set beyond this, so i32 arithmetic never overflows
PACE_LIMIT: Final = 15000  # steps/s
RATE_MIN: Final = 100  # steps/s2, least accel and decel
STANDS_WITHIN: Final = 10  # s from full pace, so max_pace <= 10 * decel
GUIDE_PACE_LIMIT: Final = 4000  # guide steps/s of GuideTo
CATCH_UP_COUNTS: Final = 16  # counts of the guide's line followed in one tick, at most one step, at rest
COUNTS_PER_TURN_LIMIT: Final = 400
STEPS_PER_TURN_LIMIT: Final = 800
FITTABLE: Final = 0x3F  # the capabilities that Setup.fitted may name

# ---------------------------------------------------------------- which command is legal in which state

_OFF = 1 << State.DRIVES_OFF
_READY = 1 << State.READY
_TURNING = 1 << State.TURNING
_HELD = 1 << State.HELD
_TRIPPED = 1 << State.TRIPPED

LEGAL: Final[dict[int, int]] = {  # bit n: legal in state n. Hold, Greet and Beat are heard in every state.
    m.Setup.CODE: _OFF,
    m.Arm.CODE: _OFF,
    m.Disarm.CODE: _READY | _HELD,
    m.Lay.CODE: _OFF | _READY | _TURNING | _HELD,
    m.Pace.CODE: _READY | _TURNING | _HELD,
    m.StopAt.CODE: _READY | _TURNING | _HELD,
    m.Go.CODE: _READY | _HELD,
    m.GuideTo.CODE: _READY | _HELD,
    m.SetDatum.CODE: _OFF | _READY | _HELD | _TRIPPED,
    m.Measure.CODE: _OFF | _READY | _TURNING | _HELD | _TRIPPED,
    m.ClearTrip.CODE: _TRIPPED,
}
POWERED: Final = _READY | _TURNING | _HELD  # states in which an input or a check can trip the board


def still_ticks(driven: bool, counts_per_turn: int) -> int:
    """Ticks without a count after which the spindle is said to stand.

    A driven spindle stands soon after its last step. One turned by hand is only known to stand when counts
    stay away for longer than they would at 30 rpm.
    """
    return STILL if driven else max(STILL, STILL_COARSE // counts_per_turn)
