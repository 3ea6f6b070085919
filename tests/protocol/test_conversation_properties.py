"""Whatever a board says, in whatever order: what the host may never send."""

from __future__ import annotations

from binascii import crc_hqx
from collections import Counter
from contextlib import suppress
from dataclasses import replace
from itertools import count
from random import Random
from typing import cast

from hypothesis import given
from hypothesis import strategies as st

from windctl.errors import WindctlError
from windctl.protocol.conversation import Conversation
from windctl.protocol.frames import FrameReader, encode
from windctl.protocol.messages import (
    Accepted,
    Arm,
    BoardMessage,
    ClearTrip,
    Go,
    Greet,
    Hold,
    HostMessage,
    Lay,
    Pace,
    Refusal,
    Refused,
    SetDatum,
    State,
    StopAt,
    decode,
)
from windctl.protocol.wants import Datum, Permission, Sampling, Wants

from .talking import IDENTITY, PROGRAM, SETUP, STATUS

CONSENTED = (Arm, Go, ClearTrip)


def consent(wants: Wants, kind: type[HostMessage]) -> Permission | None:
    """What is consented to for this kind of command."""
    return {Arm: wants.armed, Go: wants.go, ClearTrip: wants.clear_trip}[kind]


class Observer:
    """Judges what the host sends by the bytes on the line and by what is wanted, as a board would see it."""

    def __init__(self) -> None:
        self.last: tuple[int, HostMessage] | None = None  # the numbered command sent last
        self.nonce = 0
        self.used: set[tuple[type[HostMessage], Permission]] = set()
        self.sent: Counter[str] = Counter()

    def judge(self, number: int, message: HostMessage, wants: Wants, present: Permission | None) -> None:
        """Fails if `message` may not be sent now. `present`: boot and epoch as last heard."""
        self.sent[message.NAME] += 1
        if not message.NUMBERED:
            return
        repeated = self.last == (number, message)
        self.last = (number, message)
        if isinstance(message, Greet):
            self.nonce = message.nonce
        if not isinstance(message, Arm | Go | ClearTrip | SetDatum | Pace | StopAt):
            return
        meant_for = Permission(message.boot, message.epoch)
        assert meant_for == present, "sent for another boot or epoch than the one heard last"
        assert not wants.hold or isinstance(message, ClearTrip | SetDatum), "sent while a hold is wanted"
        if isinstance(message, CONSENTED) and not repeated:
            assert consent(wants, type(message)) == meant_for, "nobody consented to this"
            assert (type(message), meant_for) not in self.used, "a consent was used twice"
            self.used.add((type(message), meant_for))

    def refused(self) -> None:
        """Nothing was done: the consent may be given once more."""
        if self.last is not None and isinstance(self.last[1], CONSENTED):
            message = self.last[1]
            self.used.discard((type(message), Permission(message.boot, message.epoch)))


class Liar:
    """A board that mostly behaves, and otherwise says anything: forgets, repeats, contradicts itself."""

    def __init__(self, random: Random) -> None:
        self.random = random
        self.status = replace(STATUS, epoch=0xFFF8, boot=0xFFFF)
        self.setup_crc = self.program = 0
        self.queue: list[tuple[int, BoardMessage]] = []

    def hear(self, number: int, message: HostMessage) -> None:
        random = self.random
        if random.random() < 0.1:
            return  # lost
        if isinstance(message, Greet):
            self._epoch()
            status = self.status
            nonce = message.nonce if random.random() < 0.9 else message.nonce ^ 1
            identity = replace(
                IDENTITY,
                nonce=nonce,
                boot=status.boot,
                epoch=status.epoch,
                state=status.state,
                setup_crc=self.setup_crc,
                program=self.program,
                next=status.next,
                program_crc=status.program_crc,
            )
            self.queue.append((number, identity))
        elif message.NUMBERED:
            command = message.CODE if random.random() < 0.95 else random.randrange(16)
            number ^= random.random() < 0.05
            if random.random() < 0.15:
                why = int(random.choice(list(Refusal)))
                self.queue.append((number, Refused(command, why, self.status.epoch, random.randrange(40))))
                return
            self._do(message)
            self.queue.append((number, Accepted(command, self.status.epoch, 0)))
        elif isinstance(message, Hold):
            if self.status.state == State.TURNING:
                self.status = replace(self.status, state=State.HELD)
            self._epoch()

    def says(self) -> list[tuple[int, BoardMessage]]:
        random = self.random
        if random.random() < 0.05:
            self.status = replace(self.status, state=int(random.choice(list(State))))
            self._epoch()
        if random.random() < 0.01:
            self.status = replace(self.status, boot=(self.status.boot + 1) & 0xFFFF, epoch=0)
        self.status = replace(self.status, ticks=(self.status.ticks + 50) & 0xFFFFFFFF)
        words = [(0, self._lie(self.status)), *self.queue]
        self.queue = []
        if random.random() < 0.1:
            random.shuffle(words)
        if random.random() < 0.1:
            words = words * 2
        if random.random() < 0.1:
            self.queue = words[1:]  # late
            words = words[:1]
        return words

    def _lie(self, status: BoardMessage) -> BoardMessage:
        if self.random.random() < 0.9:
            return status
        assert status is self.status
        return replace(
            self.status,
            ticks=self.status.ticks - self.random.choice([0, 50, 500]),
            epoch=(self.status.epoch + self.random.choice([-1, 0, 0, 0, 1])) & 0xFFFF,
            state=int(self.random.choice(list(State))),
        )

    def _epoch(self) -> None:
        if self.random.random() < 0.95:  # some boards forget
            self.status = replace(self.status, epoch=(self.status.epoch + 1) & 0xFFFF)

    def _do(self, message: HostMessage) -> None:
        status = self.status
        match message:
            case SetDatum():
                self.program = message.program
                self.status = replace(status, next=0, program_crc=0xFFFF)
            case Lay() if message.first == status.next:
                laid = crc_hqx(message.segments[: 4 * message.n], status.program_crc)
                self.status = replace(status, next=status.next + message.n, program_crc=laid)
            case Arm():
                self.status = replace(status, state=State.READY)
                self._epoch()
            case Go():
                self.status = replace(status, state=State.TURNING)
            case ClearTrip():
                self.status = replace(status, state=State.DRIVES_OFF)
                self._epoch()
            case StopAt():
                self.status = replace(status, stop_point=message.count)
            case _:
                if message.CODE == SETUP.CODE:
                    self.setup_crc = crc_hqx(message.encode_body(), 0xFFFF)


def wishes(random: Random, present: Permission | None, before: Wants) -> Wants:
    """What is wanted next: mostly what was wanted before, mostly what makes sense."""
    if random.random() < 0.6:
        return before

    def consents() -> Permission | None:
        if present is None or random.random() < 0.3:
            return None
        off = random.choice([0, 0, 0, 0, 1, -1])
        return Permission(present.boot, (present.epoch + off) & 0xFFFF)

    datum = None if present is None else Datum(0, 0, 0, 0, present)
    return Wants(
        beat=True,
        hold=random.random() < 0.1,
        setup=SETUP,
        datum=datum if random.random() < 0.5 else None,
        program=PROGRAM,
        armed=consents(),
        disarmed=random.random() < 0.05,
        pace=random.choice([500, 500, 900]),
        stop_point=random.choice([None, 100, 100, 200]),
        go=consents(),
        sampling=random.choice([None, Sampling(100, 200)]),
        clear_trip=consents(),
    )


def converse(seed: int) -> Counter[str]:
    """Two hundred rounds with a liar; what was sent. Fails when the host sends what it must not."""
    random = Random(seed)
    conversation = Conversation(count(seed + 1))
    reader = FrameReader()
    observer, board = Observer(), Liar(random)
    wants = Wants()
    now = 0.0
    for _ in range(200):
        now += random.choice([0.0, 0.01, 0.01, 0.06, 0.3])
        wants = wishes(random, conversation.board.permission, wants)
        data = b""
        with suppress(WindctlError):
            data = conversation.advance(wants, now)
        frames = reader.feed(data)
        messages = [cast(HostMessage, decode(frame.code, frame.body)) for frame in frames]
        assert not any(isinstance(message, Hold) for message in messages[1:]), "something overtook a hold"
        present = conversation.board.permission
        for frame, message in zip(frames, messages, strict=True):
            observer.judge(frame.sequence, message, wants, present)
            board.hear(frame.sequence, message)
        for number, word in board.says():
            taken = conversation.receive(encode(word.CODE, number, word.encode_body()), now)
            if taken and isinstance(word, Refused):
                observer.refused()
    return observer.sent


def test_no_board_can_make_the_host_send_what_it_must_not() -> None:
    sent: Counter[str] = Counter()
    for seed in range(100):
        try:
            sent += converse(seed)
        except AssertionError as error:
            raise AssertionError(f"with seed {seed}: {error}") from error
    for name in ("Go", "Arm", "ClearTrip", "SetDatum", "Hold", "Pace", "StopAt", "Disarm"):
        assert sent[name] > 30, f"too few of {name} to mean anything: {sent}"


@given(st.binary(max_size=400))
def test_no_bytes_can_harm_the_receiving_side(data: bytes) -> None:
    conversation = Conversation(count(1))
    conversation.advance(Wants(), 0.0)
    assert conversation.receive(data, 0.1) == []
