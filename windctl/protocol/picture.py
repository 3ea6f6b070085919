"""What is known of the board: a frozen picture, and how each message of the board changes it.

Pure functions, picture in and picture out. Messages may come twice, late, or in another order than sent:
nothing older than what is known moves the picture back. Ticks (u32), epochs and boot numbers (u16) wrap.
"""

from __future__ import annotations

from binascii import crc_hqx
from dataclasses import dataclass, replace

from windctl.protocol.frames import CRC_START
from windctl.protocol.messages import (
    Accepted,
    Capability,
    Go,
    GuideTo,
    HostMessage,
    Identity,
    InputBit,
    Lay,
    Measure,
    Pace,
    Reading,
    Refusal,
    Refused,
    SetDatum,
    Setup,
    State,
    Status,
    StopAt,
)
from windctl.protocol.rules import NO_STOP_POINT
from windctl.protocol.wants import Datum, Permission


@dataclass(frozen=True, slots=True)
class Declared:
    """A place in a program that the board has taken, until it turns or its guide is brought elsewhere: see
    `messages.SetDatum`."""

    program: int
    count: int
    guide: int
    next: int
    into: int

    @classmethod
    def of(cls, program: int, datum: Datum) -> Declared:
        """What a wanted datum declares, whenever and by whoever it was given."""
        return cls(program, datum.count, datum.guide, datum.next, datum.into)


@dataclass(frozen=True, slots=True)
class BoardPicture:
    """The board as last heard of. `None` is "not known".

    `boot`, `epoch`: the newest heard in any message. `program`, `base`, `next`, `executing`: its queue.
    `pace`, `stop_asked`: what it accepted, with the epoch it was accepted in.
    """

    greeted: bool = False
    identity: Identity | None = None
    status: Status | None = None  # since the last Identity
    boot: int | None = None
    epoch: int | None = None
    last_ticks: int | None = None  # of this boot
    reading_ticks: int | None = None
    setup_crc: int = 0
    program: int = 0
    base: int = 0
    next: int = 0
    executing: int = 0
    declared: Declared | None = None
    placed_at: int | None = None  # ticks of the Status before that: only a later one tells of the new queue
    pace: tuple[int, int] | None = None  # epoch, steps/s
    stop_asked: tuple[int, int] | None = None  # epoch, count
    measuring: Measure | None = None
    laid_all: bool = False  # of the program wanted last

    @property
    def state(self) -> int | None:
        """A `messages.State` as last reported."""
        if self.status is not None:
            return self.status.state
        return self.identity.state if self.identity is not None else None

    @property
    def permission(self) -> Permission | None:
        """What a consent given now is good for."""
        if not self.greeted or self.boot is None or self.epoch is None:
            return None
        return Permission(self.boot, self.epoch)

    @property
    def capabilities(self) -> Capability:
        """What is fitted, as the board says."""
        return Capability(self.identity.capabilities if self.identity is not None else 0)

    @property
    def stands(self) -> bool:
        """A Status of the present epoch says that spindle and guide are at rest."""
        status = self.status
        return (
            status is not None
            and status.epoch == self.epoch
            and status.state != State.TURNING
            and status.speed == 0
            and bool(status.inputs & InputBit.STANDING)
        )

    @property
    def queue(self) -> int:
        """Places in the board's segment queue."""
        return self.identity.queue if self.identity is not None else 0

    @property
    def lead_segments(self) -> int:
        """Segments laid and not yet wound, the one being wound included."""
        return max(0, self.next - self.executing)

    @property
    def situation(self) -> tuple[object, ...]:
        """What has to change before a refused command is worth another try."""
        status = self.status
        if status is None:
            return (self.boot, self.epoch, self.state)
        return (
            self.boot,
            self.epoch,
            status.state,
            status.trip,
            status.trust,
            status.inputs,
            status.speed == 0,
        )


def newer(value: int, than: int, bits: int) -> bool:
    """Whether a wrapping counter of `bits` bits went on from `than` to `value`: by less than half of it."""
    return 0 < (value - than) & ((1 << bits) - 1) < 1 << (bits - 1)


def heard_identity(picture: BoardPicture, identity: Identity) -> BoardPicture:
    """After the answer to a greeting: the board's own word on everything."""
    same_boot = picture.boot == identity.boot
    declared = picture.declared
    at = (identity.program, identity.count, identity.guide, identity.base)
    if (
        not same_boot
        or declared is None
        or at
        != (
            declared.program,
            declared.count,
            declared.guide,
            declared.next,
        )
    ):
        declared = None
    return replace(
        picture,
        greeted=True,
        identity=identity,
        status=None,
        boot=identity.boot,
        epoch=identity.epoch,
        last_ticks=picture.last_ticks if same_boot else None,
        reading_ticks=picture.reading_ticks if same_boot else None,
        setup_crc=identity.setup_crc,
        program=identity.program,
        base=identity.base,
        next=identity.next,
        executing=identity.executing,
        declared=declared,
        placed_at=None,
        pace=None,
        stop_asked=None,
        measuring=None,
    )


def heard_status(picture: BoardPicture, status: Status) -> BoardPicture | None:
    """After a Status; None if it is late, a repetition, or nothing can be made of it yet.

    Another boot number means that the board has started again: the conversation has to, too.
    """
    if picture.boot is None or picture.epoch is None:
        return None
    if status.boot != picture.boot:
        if not newer(status.boot, picture.boot, 16):
            return None
        return BoardPicture(
            boot=status.boot,
            epoch=status.epoch,
            last_ticks=status.ticks,
            status=status,
            identity=picture.identity,
        )
    if newer(picture.epoch, status.epoch, 16):
        return None
    if picture.last_ticks is not None and not newer(status.ticks, picture.last_ticks, 32):
        return None
    return replace(
        picture,
        status=status,
        epoch=status.epoch,
        last_ticks=status.ticks,
        next=status.next,
        executing=status.executing,
    )


def heard_reading(picture: BoardPicture, reading: Reading) -> BoardPicture | None:
    """After a Reading; None if it is late or a repetition."""
    if not picture.greeted:
        return None
    if picture.reading_ticks is not None and not newer(reading.ticks, picture.reading_ticks, 32):
        return None
    return replace(picture, reading_ticks=reading.ticks)


def accepted(picture: BoardPicture, command: HostMessage, answer: Accepted) -> BoardPicture:
    """After the board has executed `command`."""
    picture = with_epoch(picture, answer.epoch)
    match command:
        case Setup():  # voids the place, the program, the pace and the stop point
            setup_crc = crc_hqx(command.encode_body(), CRC_START)
            return replace(_placed(picture, 0, 0), setup_crc=setup_crc, declared=None, pace=None)
        case SetDatum():
            declared = Declared(command.program, command.count, command.guide, command.next, command.into)
            return replace(_placed(picture, command.program, command.next), declared=declared)
        case Lay():
            return replace(picture, next=max(picture.next, command.first + command.n))
        case Pace():
            return replace(picture, pace=(command.epoch, command.pace))
        case StopAt():
            return replace(picture, stop_asked=(command.epoch, command.count))
        case Measure():
            return replace(picture, measuring=command)
        case Go() | GuideTo():
            return replace(picture, declared=None)
        case _:
            return picture


def _placed(picture: BoardPicture, program: int, first: int) -> BoardPicture:
    """With an empty queue before segment `first`, and without a stop point."""
    return replace(
        picture,
        program=program,
        base=first,
        next=first,
        executing=first,
        placed_at=picture.last_ticks,
        stop_asked=None if picture.epoch is None else (picture.epoch, NO_STOP_POINT),
    )


def refused(picture: BoardPicture, answer: Refused) -> BoardPicture:
    """After a refusal: it tells the epoch, and of a gap where to go on."""
    picture = with_epoch(picture, answer.epoch)
    if answer.why == Refusal.GAP:
        return replace(picture, next=answer.limit & 0xFFFFFFFF)
    return picture


def with_epoch(picture: BoardPicture, epoch: int) -> BoardPicture:
    """After hearing an epoch in an answer."""
    if picture.epoch is None or not newer(epoch, picture.epoch, 16):
        return picture
    return replace(picture, epoch=epoch)
