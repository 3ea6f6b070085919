"""Every message of the board protocol, as frozen dataclasses. Generated from messages.toml.

A body is fixed in length, little endian. `encode_body` raises `struct.error` for a value outside its type.
Named values (states, causes, ...) stay plain integers in the messages, so that a newer board's unknown value
can still be shown; compare them with the tables here.
"""

from __future__ import annotations

import struct
from dataclasses import dataclass
from enum import IntEnum, IntFlag
from typing import ClassVar, Final

PROTOCOL: Final = 1
SCHEMA: Final = 0x98CFA975  # CRC-32 of what both sides must agree on
SEGMENTS_PER_LAY: Final = 12
BODY_LIMIT: Final = 60  # bytes


class State(IntEnum):
    """Values of [states]."""

    DRIVES_OFF = 0
    READY = 1
    TURNING = 2
    HELD = 3
    TRIPPED = 4


class Cause(IntEnum):
    """Values of [causes]."""

    NONE = 0
    BOOT = 1
    GREET = 2
    HOLD = 3
    PEDAL = 4
    SILENCE = 5
    STOP_POINT = 6
    QUEUE_END = 7
    MAX_COUNT = 8
    TRIP = 9
    DISARM = 10
    ARM = 11


class Refusal(IntEnum):
    """Values of [refusals]."""

    SEQUENCE = 1
    UNKNOWN_TYPE = 2
    NOT_GREETED = 4
    STALE = 5
    STATE = 6
    MOVING = 7
    NO_SETUP = 8
    RANGE = 9
    QUEUE_FULL = 10
    GAP = 11
    PROGRAM = 12
    SEGMENT = 13
    PEDAL_DOWN = 14
    PEDAL_UP = 15
    INPUT_OPEN = 16
    NOT_FITTED = 17
    NO_DATUM = 18


class NoticeKind(IntEnum):
    """Values of [notices]."""

    BOOTED = 1
    STANDING = 2
    TRIPPED = 3
    PEDAL_ASKS = 4
    HAND_STOP_DUE = 5


class Trust(IntFlag):
    """Values of [trust], to be combined."""

    COUNT = 1
    GUIDE = 2


class InputBit(IntFlag):
    """Values of [inputs], to be combined."""

    STOP_OK = 1
    GUARD_OK = 2
    PEDAL_DOWN = 4
    GUIDE_LOW_OK = 8
    GUIDE_HIGH_OK = 16
    STANDING = 32


class Capability(IntFlag):
    """Values of [capabilities], to be combined."""

    DRIVE_STEP = 1
    GUIDE_STEP = 2
    INDEX = 4
    CONTACT = 8
    TENSION = 16
    PEDAL = 32
    THERMOMETER = 64
    VIRTUAL = 128


class ReadingFlag(IntFlag):
    """Values of [reading_flags], to be combined."""

    TURNING = 1
    OPEN = 2


class Trip(IntEnum):
    """Why the board stopped by itself."""

    NONE = 0
    STOP_INPUT = 1
    GUARD = 2
    OVERSPEED = 3
    SLIP = 4
    INDEX = 5
    REVERSE = 6
    TENSION_LOW = 7
    TENSION_HIGH = 8
    GUIDE_LIMIT = 9
    INTERNAL = 10


@dataclass(frozen=True, slots=True)
class TripRule:
    """One trip: its IEC 60204-1 stop category, and whether count and guide can be trusted."""

    trip: Trip
    category: int
    count: bool
    guide: bool
    cause: str
    clears: str


TRIPS: Final[dict[int, TripRule]] = {
    1: TripRule(
        Trip.STOP_INPUT,
        0,
        True,
        True,
        "the stop input opened: hardware removes drive power, the firmware only learns of it",
        "release the hardware stop, then ClearTrip",
    ),
    2: TripRule(
        Trip.GUARD,
        1,
        True,
        True,
        "the guard opened while drives were powered",
        "close the guard, then ClearTrip",
    ),
    3: TripRule(
        Trip.OVERSPEED,
        1,
        True,
        True,
        "while driven, the speed counted over 64 ticks exceeded Setup.max_pace by more than a quarter",
        "ClearTrip",
    ),
    4: TripRule(
        Trip.SLIP,
        1,
        True,
        True,
        "issued and counted steps came to differ by more than Setup.slip_counts (belt, stall, lost counts)",
        "check belt and encoder, then ClearTrip",
    ),
    5: TripRule(
        Trip.INDEX,
        1,
        False,
        True,
        "the index pulse came at another place than a whole turn, or not within a turn and a half",
        "confirm the turn by hand, SetDatum, ClearTrip",
    ),
    6: TripRule(
        Trip.REVERSE,
        1,
        True,
        True,
        "the spindle went back more than Setup.reverse_counts while turning",
        "ClearTrip",
    ),
    7: TripRule(
        Trip.TENSION_LOW,
        1,
        True,
        True,
        "mean tension of a turn below Setup.tension_low: the wire broke, left its path, or ran out",
        "look to the wire, then ClearTrip",
    ),
    8: TripRule(
        Trip.TENSION_HIGH,
        1,
        True,
        True,
        "mean tension of a turn above Setup.tension_high: the wire is caught",
        "free the wire, then ClearTrip",
    ),
    9: TripRule(
        Trip.GUIDE_LIMIT,
        1,
        True,
        False,
        "a guide limit switch opened, or a step would leave Setup's guide limits",
        "bring the guide back, SetDatum, ClearTrip",
    ),
    10: TripRule(
        Trip.INTERNAL,
        1,
        False,
        False,
        "the firmware found itself in a state it does not know",
        "power the board off and on",
    ),
}


_GREET = struct.Struct("<II")


@dataclass(frozen=True, slots=True)
class Greet:
    """Opens a conversation and sets the sequence. Stops whatever moves."""

    NAME: ClassVar[str] = "Greet"
    CODE: ClassVar[int] = 0x01
    SIZE: ClassVar[int] = 8
    NUMBERED: ClassVar[bool] = True
    MOVES: ClassVar[bool] = False

    nonce: int  # u32
    schema: int  # u32: CRC-32 of this file's canonical form

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _GREET.pack(self.nonce, self.schema)

    @classmethod
    def decode_body(cls, body: bytes) -> Greet:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_GREET.unpack(body))


_SETUP = struct.Struct("<IHHIHHHiiHHHHBB")


@dataclass(frozen=True, slots=True)
class Setup:
    """Limits for one coil. Another one than the last voids place, program, pace and stop point. Nothing in
    it disables the stop and guard inputs.
    """

    NAME: ClassVar[str] = "Setup"
    CODE: ClassVar[int] = 0x02
    SIZE: ClassVar[int] = 36
    NUMBERED: ClassVar[bool] = True
    MOVES: ClassVar[bool] = False

    coil_token: int  # u32: names the coil across resets
    counts_per_turn: int  # u16: 1..400
    steps_per_turn: int  # u16: spindle steps, 1..800
    max_count: int  # u32: hard limit, never passed; at most 2^30
    max_pace: int  # u16, steps/s: at most 15000 and 10 * decel
    accel: int  # u16, steps/s2: at least 100
    decel: int  # u16, steps/s2: at least 100
    guide_min: int  # i32, guide steps
    guide_max: int  # i32, guide steps
    # u16, counts: allowed difference of issued and counted, and of the index from its place; at least 2 if a
    # count is more than a step
    slip_counts: int
    reverse_counts: int  # u16, counts: allowed way back while turning
    tension_low: int  # u16, sensor units: of the mean per turn; 0: no lower bound
    tension_high: int  # u16, sensor units: 65535: no upper bound
    fitted: int  # u8: capabilities this coil uses
    # u8: seen by someone facing the spindle's nose: 0 clockwise, 1 counter-clockwise; winding always counts
    # up
    rotation: int

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _SETUP.pack(
            self.coil_token,
            self.counts_per_turn,
            self.steps_per_turn,
            self.max_count,
            self.max_pace,
            self.accel,
            self.decel,
            self.guide_min,
            self.guide_max,
            self.slip_counts,
            self.reverse_counts,
            self.tension_low,
            self.tension_high,
            self.fitted,
            self.rotation,
        )

    @classmethod
    def decode_body(cls, body: bytes) -> Setup:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_SETUP.unpack(body))


_ARM = struct.Struct("<HH")


@dataclass(frozen=True, slots=True)
class Arm:
    """Powers the drives: drives_off to ready."""

    NAME: ClassVar[str] = "Arm"
    CODE: ClassVar[int] = 0x03
    SIZE: ClassVar[int] = 4
    NUMBERED: ClassVar[bool] = True
    MOVES: ClassVar[bool] = True

    boot: int  # u16
    epoch: int  # u16

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _ARM.pack(self.boot, self.epoch)

    @classmethod
    def decode_body(cls, body: bytes) -> Arm:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_ARM.unpack(body))


_DISARM = struct.Struct("<")


@dataclass(frozen=True, slots=True)
class Disarm:
    """Takes the power off: ready or held to drives_off."""

    NAME: ClassVar[str] = "Disarm"
    CODE: ClassVar[int] = 0x04
    SIZE: ClassVar[int] = 0
    NUMBERED: ClassVar[bool] = True
    MOVES: ClassVar[bool] = False

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _DISARM.pack()

    @classmethod
    def decode_body(cls, body: bytes) -> Disarm:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_DISARM.unpack(body))


_LAY = struct.Struct("<IIB48s")


@dataclass(frozen=True, slots=True)
class Lay:
    """Appends segments to the queue: all or nothing, harmless when repeated. Only with a guide fitted."""

    NAME: ClassVar[str] = "Lay"
    CODE: ClassVar[int] = 0x05
    SIZE: ClassVar[int] = 57
    NUMBERED: ClassVar[bool] = True
    MOVES: ClassVar[bool] = False

    program: int  # u32: first four bytes of the program's digest, big endian
    first: int  # u32: index of the first segment here
    n: int  # u8: 1..12 used
    segments: bytes  # 12 x (u16, i16) packed, 48 bytes

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _LAY.pack(self.program, self.first, self.n, self.segments)

    @classmethod
    def decode_body(cls, body: bytes) -> Lay:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_LAY.unpack(body))


_PACE = struct.Struct("<HHH")


@dataclass(frozen=True, slots=True)
class Pace:
    """The pace the spindle works towards. Kept until the next one, or another Setup."""

    NAME: ClassVar[str] = "Pace"
    CODE: ClassVar[int] = 0x06
    SIZE: ClassVar[int] = 6
    NUMBERED: ClassVar[bool] = True
    MOVES: ClassVar[bool] = True

    boot: int  # u16
    epoch: int  # u16
    pace: int  # u16, steps/s

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _PACE.pack(self.boot, self.epoch, self.pace)

    @classmethod
    def decode_body(cls, body: bytes) -> Pace:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_PACE.unpack(body))


_STOPAT = struct.Struct("<HHI")


@dataclass(frozen=True, slots=True)
class StopAt:
    """The stop point; 0xFFFFFFFF: none. Inside the braking distance it brakes now. Accepted says where it
    will stand.
    """

    NAME: ClassVar[str] = "StopAt"
    CODE: ClassVar[int] = 0x07
    SIZE: ClassVar[int] = 8
    NUMBERED: ClassVar[bool] = True
    MOVES: ClassVar[bool] = True

    boot: int  # u16
    epoch: int  # u16
    count: int  # u32

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _STOPAT.pack(self.boot, self.epoch, self.count)

    @classmethod
    def decode_body(cls, body: bytes) -> StopAt:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_STOPAT.unpack(body))


_GO = struct.Struct("<HH")


@dataclass(frozen=True, slots=True)
class Go:
    """Starts to wind: ready or held to turning."""

    NAME: ClassVar[str] = "Go"
    CODE: ClassVar[int] = 0x08
    SIZE: ClassVar[int] = 4
    NUMBERED: ClassVar[bool] = True
    MOVES: ClassVar[bool] = True

    boot: int  # u16
    epoch: int  # u16

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _GO.pack(self.boot, self.epoch)

    @classmethod
    def decode_body(cls, body: bytes) -> Go:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_GO.unpack(body))


_HOLD = struct.Struct("<")


@dataclass(frozen=True, slots=True)
class Hold:
    """Stop under control and stay powered. Always executed, whatever its number; the Status of the same
    tick is its answer.
    """

    NAME: ClassVar[str] = "Hold"
    CODE: ClassVar[int] = 0x09
    SIZE: ClassVar[int] = 0
    NUMBERED: ClassVar[bool] = False
    MOVES: ClassVar[bool] = False

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _HOLD.pack()

    @classmethod
    def decode_body(cls, body: bytes) -> Hold:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_HOLD.unpack(body))


_GUIDETO = struct.Struct("<HHiH")


@dataclass(frozen=True, slots=True)
class GuideTo:
    """Moves the guide while the spindle stands."""

    NAME: ClassVar[str] = "GuideTo"
    CODE: ClassVar[int] = 0x0A
    SIZE: ClassVar[int] = 10
    NUMBERED: ClassVar[bool] = True
    MOVES: ClassVar[bool] = True

    boot: int  # u16
    epoch: int  # u16
    guide: int  # i32, guide steps
    pace: int  # u16, guide steps/s: 1..4000

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _GUIDETO.pack(self.boot, self.epoch, self.guide, self.pace)

    @classmethod
    def decode_body(cls, body: bytes) -> GuideTo:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_GUIDETO.unpack(body))


_SETDATUM = struct.Struct("<HHIiiIH")


@dataclass(frozen=True, slots=True)
class SetDatum:
    """Declares where the machine stands, and empties the queue. From then on count and guide are trusted."""

    NAME: ClassVar[str] = "SetDatum"
    CODE: ClassVar[int] = 0x0B
    SIZE: ClassVar[int] = 22
    NUMBERED: ClassVar[bool] = True
    MOVES: ClassVar[bool] = True

    boot: int  # u16
    epoch: int  # u16
    program: int  # u32
    count: int  # i32
    guide: int  # i32, guide steps
    next: int  # u32: first segment the host will lay
    into: int  # u16: counts of that segment already wound

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _SETDATUM.pack(
            self.boot,
            self.epoch,
            self.program,
            self.count,
            self.guide,
            self.next,
            self.into,
        )

    @classmethod
    def decode_body(cls, body: bytes) -> SetDatum:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_SETDATUM.unpack(body))


_MEASURE = struct.Struct("<HH")


@dataclass(frozen=True, slots=True)
class Measure:
    """Readings of the contact, each a mean over `window` ticks, while turning extended to whole
    revolutions.
    """

    NAME: ClassVar[str] = "Measure"
    CODE: ClassVar[int] = 0x0C
    SIZE: ClassVar[int] = 4
    NUMBERED: ClassVar[bool] = True
    MOVES: ClassVar[bool] = False

    window: int  # u16, ticks: a multiple of 100, at most 6000; 0 ends the readings
    # u16, ticks: from the beginning of one to that of the next, if it is over; 0: one reading only
    every: int

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _MEASURE.pack(self.window, self.every)

    @classmethod
    def decode_body(cls, body: bytes) -> Measure:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_MEASURE.unpack(body))


_CLEARTRIP = struct.Struct("<HH")


@dataclass(frozen=True, slots=True)
class ClearTrip:
    """Tripped to drives_off, once the inputs are closed and the spindle stands."""

    NAME: ClassVar[str] = "ClearTrip"
    CODE: ClassVar[int] = 0x0D
    SIZE: ClassVar[int] = 4
    NUMBERED: ClassVar[bool] = True
    MOVES: ClassVar[bool] = True

    boot: int  # u16
    epoch: int  # u16

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _CLEARTRIP.pack(self.boot, self.epoch)

    @classmethod
    def decode_body(cls, body: bytes) -> ClearTrip:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_CLEARTRIP.unpack(body))


_BEAT = struct.Struct("<")


@dataclass(frozen=True, slots=True)
class Beat:
    """The host is alive, and its record is healthy."""

    NAME: ClassVar[str] = "Beat"
    CODE: ClassVar[int] = 0x0E
    SIZE: ClassVar[int] = 0
    NUMBERED: ClassVar[bool] = False
    MOVES: ClassVar[bool] = False

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _BEAT.pack()

    @classmethod
    def decode_body(cls, body: bytes) -> Beat:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_BEAT.unpack(body))


_IDENTITY = struct.Struct("<IIHHBBBBHIHIIIIHiiHH")


@dataclass(frozen=True, slots=True)
class Identity:
    """Answer to Greet."""

    NAME: ClassVar[str] = "Identity"
    CODE: ClassVar[int] = 0x81
    SIZE: ClassVar[int] = 54

    nonce: int  # u32
    schema: int  # u32
    boot: int  # u16
    epoch: int  # u16
    state: int  # u8
    trip: int  # u8
    trust: int  # u8
    capabilities: int  # u8
    queue: int  # u16: places in the segment queue
    coil_token: int  # u32
    setup_crc: int  # u16: CRC-16 of the last Setup body, 0: none
    program: int  # u32
    base: int  # u32: `next` of the last SetDatum
    next: int  # u32: first segment not yet laid
    executing: int  # u32: segment being wound
    program_crc: int  # u16: CRC-16 over the segments base..next-1 as laid
    count: int  # i32
    guide: int  # i32
    contact_scale: int  # u16, milliohm per unit
    tension_scale: int  # u16, 0.0001 cN per unit

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _IDENTITY.pack(
            self.nonce,
            self.schema,
            self.boot,
            self.epoch,
            self.state,
            self.trip,
            self.trust,
            self.capabilities,
            self.queue,
            self.coil_token,
            self.setup_crc,
            self.program,
            self.base,
            self.next,
            self.executing,
            self.program_crc,
            self.count,
            self.guide,
            self.contact_scale,
            self.tension_scale,
        )

    @classmethod
    def decode_body(cls, body: bytes) -> Identity:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_IDENTITY.unpack(body))


_ACCEPTED = struct.Struct("<BHi")


@dataclass(frozen=True, slots=True)
class Accepted:
    """The command of the same sequence number was executed."""

    NAME: ClassVar[str] = "Accepted"
    CODE: ClassVar[int] = 0x82
    SIZE: ClassVar[int] = 7

    command: int  # u8
    epoch: int  # u16
    value: int  # i32: StopAt: the count at which it will stand

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _ACCEPTED.pack(self.command, self.epoch, self.value)

    @classmethod
    def decode_body(cls, body: bytes) -> Accepted:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_ACCEPTED.unpack(body))


_REFUSED = struct.Struct("<BBHi")


@dataclass(frozen=True, slots=True)
class Refused:
    """The command of the same sequence number changed nothing."""

    NAME: ClassVar[str] = "Refused"
    CODE: ClassVar[int] = 0x83
    SIZE: ClassVar[int] = 8

    command: int  # u8
    why: int  # u8
    epoch: int  # u16
    limit: int  # i32

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _REFUSED.pack(self.command, self.why, self.epoch, self.limit)

    @classmethod
    def decode_body(cls, body: bytes) -> Refused:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_REFUSED.unpack(body))


_STATUS = struct.Struct("<IHHBBBBBiiIIIHHHhH")


@dataclass(frozen=True, slots=True)
class Status:
    """Every 50 ticks, and at once on a change of state."""

    NAME: ClassVar[str] = "Status"
    CODE: ClassVar[int] = 0x84
    SIZE: ClassVar[int] = 43

    ticks: int  # u32, ms
    boot: int  # u16
    epoch: int  # u16
    state: int  # u8
    cause: int  # u8
    trip: int  # u8
    trust: int  # u8
    inputs: int  # u8
    count: int  # i32
    guide: int  # i32
    stop_point: int  # u32: 0xFFFFFFFF: none
    next: int  # u32
    executing: int  # u32
    program_crc: int  # u16
    speed: int  # u16, steps/s: without a drive: counts/s as measured
    tension: int  # u16, sensor units: mean of the last whole turn
    celsius: int  # i16, 0.01 degree C
    bad_frames: int  # u16

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _STATUS.pack(
            self.ticks,
            self.boot,
            self.epoch,
            self.state,
            self.cause,
            self.trip,
            self.trust,
            self.inputs,
            self.count,
            self.guide,
            self.stop_point,
            self.next,
            self.executing,
            self.program_crc,
            self.speed,
            self.tension,
            self.celsius,
            self.bad_frames,
        )

    @classmethod
    def decode_body(cls, body: bytes) -> Status:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_STATUS.unpack(body))


_READING = struct.Struct("<IiIHhB")


@dataclass(frozen=True, slots=True)
class Reading:
    """The contact's mean over one window."""

    NAME: ClassVar[str] = "Reading"
    CODE: ClassVar[int] = 0x85
    SIZE: ClassVar[int] = 17

    ticks: int  # u32, ms: when it was complete
    count: int  # i32: at the middle of it
    value: int  # u32, 1/16 unit
    window: int  # u16, ticks: that were averaged; the boxcar reaches 99 further back
    celsius: int  # i16, 0.01 degree C
    flags: int  # u8

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _READING.pack(self.ticks, self.count, self.value, self.window, self.celsius, self.flags)

    @classmethod
    def decode_body(cls, body: bytes) -> Reading:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_READING.unpack(body))


_NOTICE = struct.Struct("<IBii")


@dataclass(frozen=True, slots=True)
class Notice:
    """Something happened that must not wait for the next Status. May be lost; Status tells the same."""

    NAME: ClassVar[str] = "Notice"
    CODE: ClassVar[int] = 0x86
    SIZE: ClassVar[int] = 13

    ticks: int  # u32
    kind: int  # u8
    a: int  # i32
    b: int  # i32

    def encode_body(self) -> bytes:
        """The body as it goes into a frame."""
        return _NOTICE.pack(self.ticks, self.kind, self.a, self.b)

    @classmethod
    def decode_body(cls, body: bytes) -> Notice:
        """The message in a body of exactly SIZE bytes."""
        return cls(*_NOTICE.unpack(body))


HostMessage = (
    Greet
    | Setup
    | Arm
    | Disarm
    | Lay
    | Pace
    | StopAt
    | Go
    | Hold
    | GuideTo
    | SetDatum
    | Measure
    | ClearTrip
    | Beat
)  # fmt: skip

BoardMessage = (
    Identity
    | Accepted
    | Refused
    | Status
    | Reading
    | Notice
)  # fmt: skip

Message = HostMessage | BoardMessage

MESSAGES: Final[dict[int, type[Message]]] = {
    0x01: Greet,
    0x02: Setup,
    0x03: Arm,
    0x04: Disarm,
    0x05: Lay,
    0x06: Pace,
    0x07: StopAt,
    0x08: Go,
    0x09: Hold,
    0x0A: GuideTo,
    0x0B: SetDatum,
    0x0C: Measure,
    0x0D: ClearTrip,
    0x0E: Beat,
    0x81: Identity,
    0x82: Accepted,
    0x83: Refused,
    0x84: Status,
    0x85: Reading,
    0x86: Notice,
}


class BadMessageError(ValueError):
    """A frame whose code is not known, or whose body has another length than its code's."""


def decode(code: int, body: bytes) -> Message:
    """The message in a frame of this code. Raises BadMessageError if the code or the length is wrong."""
    kind = MESSAGES.get(code)
    if kind is None:
        raise BadMessageError(f"message code {code:#04x} is not known to protocol {PROTOCOL}")
    if len(body) != kind.SIZE:
        raise BadMessageError(f"{kind.NAME} has {len(body)} bytes, wants {kind.SIZE}")
    return kind.decode_body(body)
