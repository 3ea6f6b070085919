"""A hand-held far end for the conversation: each test says what the board says."""

from __future__ import annotations

from dataclasses import replace
from itertools import count
from typing import cast

from windctl.protocol.conversation import Conversation
from windctl.protocol.frames import FrameReader, encode
from windctl.protocol.messages import (
    SCHEMA,
    Accepted,
    BoardMessage,
    Greet,
    HostMessage,
    Identity,
    InputBit,
    Refusal,
    Refused,
    Setup,
    State,
    Status,
    Trust,
    decode,
)
from windctl.protocol.wants import Permission, Segments, Wants

AT_REST = int(InputBit.STOP_OK | InputBit.GUARD_OK | InputBit.STANDING)
BOTH = int(Trust.COUNT | Trust.GUIDE)

IDENTITY = Identity(
    nonce=0,
    schema=SCHEMA,
    boot=7,
    epoch=20,
    state=State.DRIVES_OFF,
    trip=0,
    trust=BOTH,
    capabilities=0xFF,
    queue=32,
    coil_token=0,
    setup_crc=0,
    program=0,
    base=0,
    next=0,
    executing=0,
    program_crc=0xFFFF,
    count=0,
    guide=0,
    contact_scale=250,
    tension_scale=100,
)
STATUS = Status(
    ticks=1000,
    boot=7,
    epoch=20,
    state=State.DRIVES_OFF,
    cause=0,
    trip=0,
    trust=BOTH,
    inputs=AT_REST,
    count=0,
    guide=0,
    stop_point=0xFFFFFFFF,
    next=0,
    executing=0,
    program_crc=0xFFFF,
    speed=0,
    tension=0,
    celsius=2100,
    bad_frames=0,
)
SETUP = Setup(
    coil_token=99,
    counts_per_turn=400,
    steps_per_turn=400,
    max_count=100_000,
    max_pace=6000,
    accel=2000,
    decel=3000,
    guide_min=-10_000,
    guide_max=10_000,
    slip_counts=100,
    reverse_counts=10,
    tension_low=0,
    tension_high=65535,
    fitted=0xF,
    rotation=0,
)
PROGRAM = Segments(0xC0FFEE01, b"".join(bytes((100 + i % 50, 0, i % 7, 0)) for i in range(100)))


class Bench:
    """A conversation, its time, and the frames it sent last. The board's part is spoken by the test."""

    def __init__(self, first_nonce: int = 1000) -> None:
        self.c = Conversation(count(first_nonce))
        self.now = 50.0
        self.identity = IDENTITY
        self.status = STATUS
        self._reader = FrameReader()
        self.last_sequence = 0
        self.everything: list[tuple[int, HostMessage]] = []

    # ------------------------------------------------------------ the host speaks

    def advance(self, wants: Wants, after: float = 0.0) -> list[HostMessage]:
        """The messages of one advance, `after` seconds later."""
        self.now += after
        frames = self._reader.feed(self.c.advance(wants, self.now))
        messages: list[HostMessage] = []
        for frame in frames:
            message = cast(HostMessage, decode(frame.code, frame.body))
            self.everything.append((frame.sequence, message))
            messages.append(message)
            if message.NUMBERED:
                self.last_sequence = frame.sequence
        return messages

    # ------------------------------------------------------------ the board speaks

    def hear(self, message: BoardMessage, sequence: int | None = None) -> list[BoardMessage]:
        """What `receive` makes of one message of the board."""
        number = self.last_sequence if sequence is None else sequence
        return self.c.receive(encode(message.CODE, number, message.encode_body()), self.now)

    def greet(self, wants: Wants | None = None, **changes: int) -> None:
        """Answer the greeting that goes out now; then one Status that agrees with it."""
        sent = self.advance(wants or Wants())
        greet = next(message for message in sent if isinstance(message, Greet))
        self.identity = replace(self.identity, **changes)
        self.greeted(greet)

    def greeted(self, greet: Greet) -> None:
        """The answer to this greeting, and one Status that agrees with it."""
        self.identity = identity = replace(self.identity, nonce=greet.nonce)
        self.hear(identity)
        both = (
            "boot",
            "epoch",
            "state",
            "trip",
            "trust",
            "count",
            "guide",
            "next",
            "executing",
            "program_crc",
        )
        self.tell(**{name: getattr(identity, name) for name in both})

    def tell(self, **changes: int) -> list[BoardMessage]:
        """The next Status, 50 ms after the last one."""
        ticks = changes.pop("ticks", (self.status.ticks + 50) & 0xFFFFFFFF)
        self.status = replace(self.status, ticks=ticks, **changes)
        return self.hear(self.status)

    def accept(self, command: HostMessage, epoch: int | None = None, value: int = 0) -> list[BoardMessage]:
        """The board executes the command sent last."""
        heard = self.c.board.epoch or 0
        return self.hear(Accepted(command.CODE, heard if epoch is None else epoch, value))

    def refuse(
        self, command: HostMessage, why: Refusal, limit: int = 0, epoch: int | None = None
    ) -> list[BoardMessage]:
        """The board refuses the command sent last."""
        heard = self.c.board.epoch or 0
        return self.hear(Refused(command.CODE, why, heard if epoch is None else epoch, limit))

    @property
    def permission(self) -> Permission:
        """The consent that would be good now."""
        present = self.c.board.permission
        assert present is not None
        return present


def only(messages: list[HostMessage]) -> HostMessage:
    """The one message there is."""
    assert len(messages) == 1, messages
    return messages[0]
