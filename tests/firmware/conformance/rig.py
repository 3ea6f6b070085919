"""The kit's own host: it says what a clause wants said, in any order and wrongly where that is the point.

It is not windctl's conversation on purpose: that one never says what is not allowed.
"""

from __future__ import annotations

import struct
from collections.abc import Callable, Iterable
from dataclasses import dataclass, replace
from typing import TypeVar

from tests.firmware.conformance.clause import NotJudgedError, must
from tests.firmware.conformance.hands import Act, Hands
from tests.firmware.conformance.machine import Machine
from windctl.machine.ports import Port
from windctl.protocol import messages as m
from windctl.protocol.frames import DELIMITER, FrameReader, encode
from windctl.protocol.messages import Capability, InputBit, Refusal, State

PROGRAM = 0x5EC7104A
NO_STOP_POINT = 0xFFFFFFFF
HAND_S = 60.0  # a person may take so long
ANSWER_S = 0.25  # before the same bytes are sent once more
TRIES = 4
_BEAT_S = 0.5
_READ_S = 0.01

Answer = m.Accepted | m.Refused
M = TypeVar("M", bound=m.Message)


@dataclass(frozen=True)
class Heard:
    """One message: when it came on the port's clock, and its number."""

    at: float
    sequence: int
    message: m.Message


class Rig:
    """One board under test."""

    def __init__(self, port: Port, machine: Machine, hands: Hands, nonce: int = 1) -> None:
        self.port = port
        self.machine = machine
        self.heard: list[Heard] = []
        self.beating = True
        self.beaten_at = 0.0
        self.sequence = 0
        self.last_frame = b""
        self.boot = 0
        self.epoch = 0
        self.identity: m.Identity | None = None
        self.clock_gap: float | None = None  # port's time less the board's, at the least
        self.reader = FrameReader()
        self._hands = hands
        self._nonce = nonce
        self._token = 0
        self._laid = 0
        self.same = m.Setup(*([0] * 15))  # the one in force: said again, with drives off, it changes nothing
        self._status: m.Status | None = None

    # ------------------------------------------------------------ time and hearing

    def listen(self, seconds: float, until: Callable[[], bool] | None = None) -> bool:
        """Hears for so long, beating; ends early, with True, when `until` holds."""
        end = self.port.now() + seconds
        while True:
            if until is not None and until():
                return True
            now = self.port.now()
            if now >= end:
                return until is None
            if self.beating and now - self.beaten_at >= _BEAT_S:
                self.beat()
            for frame in self.reader.feed(self.port.read(min(_READ_S, max(end - now, 0.001)))):
                must(
                    frame.code & 0x80 != 0, f"a frame to the host has code {frame.code:#04x}: high bit clear"
                )
                must(frame.code in m.MESSAGES, f"a frame of unknown code {frame.code:#04x}")
                self._take(Heard(self.port.now(), frame.sequence, m.decode(frame.code, frame.body)))

    def _take(self, heard: Heard) -> None:
        self.heard.append(heard)
        message = heard.message
        match message:
            case m.Status():
                if self._status is not None and message.ticks < self._status.ticks:
                    self.clock_gap = None  # it has started anew
                self._status = message
                self.boot, self.epoch = message.boot, message.epoch
                gap = heard.at - message.ticks / 1000.0
                self.clock_gap = gap if self.clock_gap is None else min(self.clock_gap, gap)
            case m.Identity():
                self.identity = message
                self.boot, self.epoch = message.boot, message.epoch
            case m.Accepted() | m.Refused():
                self.epoch = message.epoch

    def mark(self) -> int:
        """A place in what was heard, for `since`."""
        return len(self.heard)

    def since(self, mark: int, kind: type[M]) -> list[M]:
        """Messages of a kind heard since then."""
        return [one.message for one in self.heard[mark:] if isinstance(one.message, kind)]

    def wait_for(self, kind: type[M], seconds: float, *, suits: Callable[[M], bool] | None = None) -> M:
        """The next message of this kind (that suits). NotAsWrittenError if none comes in time."""
        begun = self.mark()
        found: list[M] = []

        def came() -> bool:
            found[:] = [one for one in self.since(begun, kind) if suits is None or suits(one)]
            return bool(found)

        must(self.listen(seconds, came), f"no {kind.__name__} of the expected kind within {seconds:g} s")
        return found[0]

    @property
    def status(self) -> m.Status:
        """The last Status."""
        if self._status is None:
            self.wait_for(m.Status, 0.5)
        assert self._status is not None
        return self._status

    def fresh_status(self) -> m.Status:
        """A Status that comes only now."""
        return self.wait_for(m.Status, 0.3)

    @property
    def permission(self) -> tuple[int, int]:
        """Boot and epoch as last heard."""
        return self.boot, self.epoch

    def wait_permission(self) -> tuple[int, int]:
        """Boot and epoch as the next Status tells them."""
        self.fresh_status()
        return self.permission

    @property
    def capabilities(self) -> Capability:
        """What the board has."""
        assert self.identity is not None
        return Capability(self.identity.capabilities)

    # ------------------------------------------------------------ saying

    def raw(self, data: bytes) -> None:
        """Bytes as they are."""
        self.port.write(data)

    def beat(self) -> None:
        """One Beat."""
        self.beaten_at = self.port.now()
        self.raw(encode(m.Beat.CODE, 0, b""))

    def hold(self, sequence: int = 0) -> None:
        """One Hold."""
        self.raw(encode(m.Hold.CODE, sequence, b""))

    def say(self, code: int, body: bytes, sequence: int) -> Answer | None:
        """A numbered frame, once; the answer with that number, if one comes."""
        self.last_frame = encode(code, sequence, body)
        return self.again(self.last_frame, sequence)

    def again(self, frame: bytes, sequence: int) -> Answer | None:
        """A frame as it is, once; the answer with that number, if one comes."""
        begun = self.mark()
        self.raw(frame)
        found: list[Answer] = []

        def came() -> bool:
            found[:] = [
                one.message
                for one in self.heard[begun:]
                if isinstance(one.message, m.Accepted | m.Refused) and one.sequence == sequence
            ]
            return bool(found)

        self.listen(ANSWER_S, came)
        return found[0] if found else None

    def ask(self, message: m.HostMessage) -> Answer:
        """A command with its due number, repeated as a host does. NotAsWrittenError if there is no answer."""
        self.sequence = (self.sequence + 1) & 0xFF
        frame = encode(message.CODE, self.sequence, message.encode_body())
        self.last_frame = frame
        for _ in range(TRIES):
            answer = self.again(frame, self.sequence)
            if answer is not None:
                must(answer.command == message.CODE, f"{message.NAME} is answered for {answer.command:#04x}")
                return answer
        must(False, f"no answer to {message.NAME} after {TRIES} times")
        raise AssertionError

    def accept(self, message: m.HostMessage) -> m.Accepted:
        """A command that must be accepted."""
        answer = self.ask(message)
        if isinstance(answer, m.Refused):
            must(False, f"{message} is refused as {named(Refusal, answer.why)}, limit {answer.limit}")
        assert isinstance(answer, m.Accepted)
        return answer

    def refuse(self, message: m.HostMessage, why: Refusal, limit: int | None = None) -> m.Refused:
        """A command that must be refused, for this reason and with this limit."""
        answer = self.ask(message)
        must(isinstance(answer, m.Refused), f"{message} is accepted; expected: refused as {why.name.lower()}")
        assert isinstance(answer, m.Refused)
        said = named(Refusal, answer.why)
        must(answer.why == why, f"{message} is refused as {said}; expected: {why.name.lower()}")
        if limit is not None:
            must(answer.limit == limit, f"{message}: limit {answer.limit}; expected: {limit}")
        return answer

    def refuse_unheard(self) -> None:
        """Ungreeted: a command under any number is refused as such."""
        answer = self.say(m.Measure.CODE, m.Measure(0, 0).encode_body(), (self.sequence + 1) & 0xFF)
        must(
            isinstance(answer, m.Refused) and answer.why == Refusal.NOT_GREETED,
            f"a command without a greeting is answered with {answer}",
        )

    def greet(self, *, sequence: int = 0, nonce: int | None = None, schema: int = m.SCHEMA) -> m.Identity:
        """Opens the conversation; the answer must echo the nonce."""
        if nonce is None:
            self._nonce = nonce = (self._nonce + 1) & 0xFFFFFFFF
        self.sequence = sequence
        frame = DELIMITER + encode(m.Greet.CODE, sequence, m.Greet(nonce, schema).encode_body())
        begun = self.mark()
        for _ in range(TRIES * 3):
            self.raw(frame)
            if self.listen(ANSWER_S, lambda: any(i.nonce == nonce for i in self.since(begun, m.Identity))):
                assert self.identity is not None
                return self.identity
        must(False, "no Identity that echoes the nonce of the Greet")
        raise AssertionError

    @property
    def nonce(self) -> int:
        """Of the last greeting."""
        return self._nonce

    # ------------------------------------------------------------ hands

    def please(self, act: Act, until: Callable[[], bool]) -> None:
        """Asks for a hand, and listens until the line shows that it was done. NotJudgedError if not."""
        if not self._hands.please(act):
            raise NotJudgedError(f"nobody is there to {act.value}")
        if not self.listen(HAND_S, until):
            raise NotJudgedError(f"not seen on the line: {act.value}")

    def input(self, bit: InputBit) -> bool:
        """An input as last heard."""
        return bool(self.status.inputs & bit)

    # ------------------------------------------------------------ ways to where a clause begins

    def fresh(self, **setup: int) -> m.Setup:
        """Greeted, drives off, nothing tripped, another Setup: count and guide unknown, queue empty."""
        self.beating = True
        self.greet()
        self.hold()
        self.settle()
        if self.status.state == State.TRIPPED:
            self.clear()
        if self.status.state in (State.READY, State.HELD):
            self.accept(m.Disarm())
        mine = self.setup(**setup)
        self.accept(mine)
        self.same = mine
        return mine

    def settle(self, seconds: float = 12.0) -> m.Status:
        """Listens until spindle and guide stand, the board not turning."""
        self.fresh_status()

        def stands() -> bool:
            return self.status.state != State.TURNING and self.input(InputBit.STANDING)

        must(self.listen(seconds, stands), f"the board does not stand within {seconds:g} s: {self.status}")
        return self.status

    def clear(self) -> None:
        """Clears a trip once the board stands without power."""
        self.settle()
        self.listen(0.1)
        self.accept(m.ClearTrip(*self.permission))
        self.fresh_status()

    def setup(self, **changes: int) -> m.Setup:
        """The machine's own figures, under a token not used before."""
        machine, turn = self.machine, self.machine.counts_per_turn
        self._token += 1
        mine = m.Setup(
            coil_token=0xC0110000 + self._token,
            counts_per_turn=turn,
            steps_per_turn=machine.steps_per_turn,
            max_count=1000 * turn,
            max_pace=machine.pace,
            accel=machine.accel,
            decel=machine.decel,
            guide_min=-machine.guide_span,
            guide_max=machine.guide_span,
            slip_counts=max(2, turn // 10),
            reverse_counts=max(2, turn // 10),
            tension_low=0,
            tension_high=0xFFFF,
            fitted=int(self.capabilities & (Capability.DRIVE_STEP | Capability.GUIDE_STEP)),
            rotation=0,
        )
        return replace(mine, **changes)

    def place(self, count: int = 0, guide: int = 0, first: int = 0, into: int = 0) -> None:
        """Says where the machine stands."""
        self.settle()
        self.accept(m.SetDatum(*self.permission, PROGRAM, count, guide, first, into))
        self._laid = first

    def arm(self) -> None:
        """Powers the drives."""
        self.accept(m.Arm(*self.permission))

    def ready(self, **setup: int) -> m.Setup:
        """`fresh`, placed at 0 and armed."""
        mine = self.fresh(**setup)
        self.place()
        self.arm()
        return mine

    def lay(self, segments: Iterable[tuple[int, int]]) -> bytes:
        """Lays segments behind the others; returns them packed."""
        segments = list(segments)
        packed = b"".join(struct.pack("<Hh", *one) for one in segments)
        for at in range(0, len(segments), m.SEGMENTS_PER_LAY):
            n = min(m.SEGMENTS_PER_LAY, len(segments) - at)
            part = packed[4 * at : 4 * (at + n)].ljust(4 * m.SEGMENTS_PER_LAY, b"\0")
            self.accept(m.Lay(PROGRAM, self._laid, n, part))
            self._laid += n
        return packed

    def go(self, stop: int = NO_STOP_POINT, pace: int | None = None) -> None:
        """Pace, stop point, Go."""
        if self.identity is not None and self.capabilities & Capability.DRIVE_STEP:
            self.accept(m.Pace(*self.permission, pace or self.machine.pace))
        self.accept(m.StopAt(*self.permission, stop))
        self.accept(m.Go(*self.permission))

    def at_pace(self, pace: int | None = None) -> m.Status:
        """Listens until the spindle has its pace."""
        wanted = pace or self.machine.pace
        return self.wait_for(m.Status, 15.0, suits=lambda s: s.speed == wanted)

    def turning(self, *, turns: int = 500, **setup: int) -> m.Setup:
        """Turning with the drive alone, at pace, far from any stop."""
        mine = self.ready(**{"fitted": int(Capability.DRIVE_STEP), **setup})
        self.go(turns * self.machine.counts_per_turn)
        self.at_pace()
        return mine

    def tripped(self) -> m.Status:
        """Tripped without a hand: the steps are said to be others than they are, so that counts fail them."""
        steps = self.machine.steps_per_turn
        wrong = steps * 2 if steps * 2 <= 800 else steps // 2
        self.ready(fitted=int(Capability.DRIVE_STEP), steps_per_turn=wrong, slip_counts=4)
        self.go(100 * self.machine.counts_per_turn)
        return self.wait_for(m.Status, 5.0, suits=lambda s: s.state == State.TRIPPED)

    def board_tick(self, at: float) -> float:
        """The board's tick at a time of the port's clock, as near as the line tells."""
        assert self.clock_gap is not None
        return (at - self.clock_gap) * 1000.0


def named(table: type, value: int) -> str:
    """`stale (5)`, or the bare value where the table has no name for it."""
    try:
        return f"{table(value).name.lower()} ({value})"
    except ValueError:
        return str(value)
