"""A board as people look at it: its state, its inputs and its sensors as plain values. Pure."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from windctl.protocol.messages import Capability, Cause, InputBit, Reading, ReadingFlag, State, Trip, Trust
from windctl.run.trips import look_to, trip_name

if TYPE_CHECKING:
    from windctl.profile.model import MachineProfile
    from windctl.protocol.messages import Status
    from windctl.protocol.picture import BoardPicture

_STATES = {
    State.DRIVES_OFF: "drives off",
    State.READY: "ready",
    State.TURNING: "turning",
    State.HELD: "held",
    State.TRIPPED: "tripped",
}
_CAUSES = {
    Cause.NONE: "",
    Cause.BOOT: "switched on",
    Cause.GREET: "stopped by the greeting",
    Cause.HOLD: "held",
    Cause.PEDAL: "the pedal was let go",
    Cause.SILENCE: "the computer was silent",
    Cause.STOP_POINT: "at the stop point",
    Cause.QUEUE_END: "out of program",
}


@dataclass(frozen=True, slots=True)
class BoardSeen:
    """What a board shows now. None: not fitted, or nothing was read yet.

    `state` is a word; `because` why it is in it, `look_to` what to put right where it tripped. `count_known`,
    `guide_known`: whether the board trusts them. Inputs are True where all is well (pedal: down).
    """

    state: str
    because: str
    look_to: str
    count: int
    turns: float
    count_known: bool
    guide_mm: float | None
    guide_known: bool
    stop_ok: bool
    guard_ok: bool
    pedal_down: bool | None
    low_ok: bool | None
    high_ok: bool | None
    standing: bool
    index: bool
    rpm: float
    tension_cn: float | None
    contact: bool
    contact_ohm: float | None
    contact_open: bool
    celsius: float | None
    bad_frames: int
    boot: int
    virtual: bool = False  # it says of itself that it simulates


def board_seen(picture: BoardPicture, reading: Reading | None, profile: MachineProfile) -> BoardSeen | None:
    """The board as last heard of, or None before its first report."""
    status, identity = picture.status, picture.identity
    if status is None or identity is None or not picture.greeted:
        return None
    has, inputs = picture.capabilities, InputBit(status.inputs)
    turn = profile.spindle.counts_per_turn
    guided, driven = bool(has & Capability.GUIDE_STEP), bool(has & Capability.DRIVE_STEP)
    ohm = None
    if reading is not None and not reading.flags & ReadingFlag.OPEN:
        ohm = reading.value / 16 * identity.contact_scale / 1000
    return BoardSeen(
        state=_STATES.get(State(status.state), "unknown"),
        because=_because(status),
        look_to=look_to(status.trip) if status.state == State.TRIPPED else "",
        count=status.count,
        turns=status.count / turn,
        count_known=bool(status.trust & Trust.COUNT),
        guide_mm=status.guide / profile.guide.steps_per_mm if guided else None,
        guide_known=bool(status.trust & Trust.GUIDE),
        stop_ok=bool(inputs & InputBit.STOP_OK),
        guard_ok=bool(inputs & InputBit.GUARD_OK),
        pedal_down=bool(inputs & InputBit.PEDAL_DOWN) if has & Capability.PEDAL and profile.pedal else None,
        low_ok=bool(inputs & InputBit.GUIDE_LOW_OK) if guided else None,
        high_ok=bool(inputs & InputBit.GUIDE_HIGH_OK) if guided else None,
        standing=bool(inputs & InputBit.STANDING),
        index=bool(has & Capability.INDEX),
        rpm=60.0 * status.speed / (profile.spindle.steps_per_turn if driven else turn),
        tension_cn=status.tension * identity.tension_scale / 10_000 if has & Capability.TENSION else None,
        contact=bool(has & Capability.CONTACT),
        contact_ohm=ohm,
        contact_open=reading is not None and bool(reading.flags & ReadingFlag.OPEN),
        celsius=status.celsius / 100 if has & Capability.THERMOMETER else None,
        bad_frames=status.bad_frames,
        boot=status.boot,
        virtual=bool(has & Capability.VIRTUAL),
    )


def _because(status: Status) -> str:
    if status.state == State.TRIPPED:
        return trip_name(status.trip) if status.trip in Trip._value2member_map_ else f"trip {status.trip}"
    return _CAUSES.get(Cause(status.cause), "") if status.cause in Cause._value2member_map_ else ""
