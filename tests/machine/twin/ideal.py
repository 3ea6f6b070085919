"""A flawless machine around the board: a step is a step, a count comes when due, bytes arrive at once.

What the tests spoil on purpose they spoil here: counts that get lost, pins that open, tension, contact.
"""

from __future__ import annotations

import struct
from collections.abc import Callable, Iterable
from typing import Any

from windctl.machine.twin.board import Board
from windctl.machine.twin.signals import ALL_OK, Inputs, Outputs
from windctl.protocol import messages as m
from windctl.protocol.frames import FrameReader, encode

EVERYTHING_BUT_PEDAL = int(
    m.Capability.DRIVE_STEP
    | m.Capability.GUIDE_STEP
    | m.Capability.INDEX
    | m.Capability.CONTACT
    | m.Capability.TENSION
)
HAND_GUIDED = int(m.Capability.DRIVE_STEP)
COUNTER_ONLY = 0
PROGRAM = 0x1234ABCD

LIMITS: dict[str, int] = {
    "coil_token": 77,
    "counts_per_turn": 400,
    "steps_per_turn": 400,
    "max_count": 400 * 3000,
    "max_pace": 8000,
    "accel": 2000,
    "decel": 3333,
    "guide_min": -4000,
    "guide_max": 4000,
    "slip_counts": 20,
    "reverse_counts": 40,
    "tension_low": 0,
    "tension_high": 65535,
    "fitted": EVERYTHING_BUT_PEDAL,
    "rotation": 0,
}


def pack(segments: Iterable[tuple[int, int]]) -> bytes:
    """Segments in their wire form."""
    return b"".join(struct.pack("<Hh", *segment) for segment in segments)


class Machine:
    """A board, an ideal plant, and a host that says what the test tells it to."""

    def __init__(self, *, beats: bool = True, **board: Any) -> None:
        self.board = Board(**board)
        self.inputs = Inputs()
        self.outputs = Outputs()
        self.beats = beats
        self.heard: list[m.Message] = []
        self.sequence = 0
        self.step = 0  # motor steps ever made
        self.position = 0  # counts the encoder has made
        self.guide = 0
        self.paces: list[int] = []
        self.positions: list[int] = []  # the guide's, after every tick
        self.pins = ALL_OK
        self.tension = 0
        self.contact: Callable[[int], int] = lambda _: 1000
        self.losing = 0  # of so many counts one is lost; 0: none
        self.lag = 0  # counts by which the counter trails while steps are made, as behind a soft belt
        self.hurry = 100  # per cent of the rate that the port really issues
        self.turned_so_far = 0  # counts turned by hand
        self.index = True
        self.counts_per_turn = LIMITS["counts_per_turn"]
        self.steps_per_turn = LIMITS["steps_per_turn"]
        self._owed = 0
        self._wire = b""
        self._reader = FrameReader()

    # ---------------------------------------------------------------- time

    def run(self, ticks: int = 1) -> None:
        """Let time pass."""
        for _ in range(ticks):
            self._tick()

    def run_until(self, condition: Callable[[], bool], at_most: int = 200_000) -> int:
        """Let time pass until it is so; returns the ticks that took. Fails when it takes too long."""
        for ticks in range(at_most):
            if condition():
                return ticks
            self._tick()
        raise AssertionError(f"not so after {at_most} ticks")

    def run_to_rest(self) -> None:
        """Until the board says that everything stands."""
        self.run_until(lambda: self.board.standing)

    def _tick(self) -> None:
        inputs, outputs, board = self.inputs, self.outputs, self.board
        self._owed += outputs.rate * self.hurry // 100
        steps, self._owed = divmod(self._owed, 1000)
        before = self.position
        inputs.steps_issued = steps
        self.step += steps
        true = self.step * self.counts_per_turn // self.steps_per_turn + self.turned_so_far
        self.position = true if not self.lag else max(before + (0 if steps else 1), true - self.lag)
        self.position = min(self.position, true)
        counted = self.position - before
        if self.losing:
            counted -= (self.position // self.losing) - (before // self.losing)
        inputs.count_delta = counted
        passed = self.position // self.counts_per_turn > before // self.counts_per_turn
        inputs.index = 1 if self.index and passed else 0
        inputs.pins = self.pins
        inputs.tension = self.tension
        inputs.contact = self.contact(board.ticks + 1)
        inputs.celsius_centi = 2150
        if self.beats and board.ticks % 500 == 0:
            self.say(m.Beat())
        inputs.received, self._wire = self._wire, b""
        board.tick(inputs, outputs)
        self.guide += outputs.guide_steps
        self.paces.append(outputs.rate)
        self.positions.append(self.guide)
        if outputs.sent:
            self.heard += [m.decode(f.code, f.body) for f in self._reader.feed(outputs.sent)]

    def turn(self, counts: int) -> None:
        """Turn the spindle by hand."""
        self.turned_so_far += counts

    # ---------------------------------------------------------------- talk

    def wire(self, data: bytes) -> None:
        """Bytes that reach the board in the next tick."""
        self._wire += data

    def say(self, message: m.HostMessage) -> bytes:
        """Send a message; numbered ones take the next number. Returns the frame."""
        if message.NUMBERED or isinstance(message, m.Greet):
            self.sequence = (self.sequence + 1) & 0xFF
        frame = encode(message.CODE, self.sequence, message.encode_body())
        self.wire(frame)
        return frame

    def ask(self, message: m.HostMessage) -> m.Identity | m.Accepted | m.Refused:
        """Send a command and return its answer, a tick later."""
        self.say(message)
        self.run()
        answers = [h for h in self.heard if isinstance(h, m.Identity | m.Accepted | m.Refused)]
        return answers[-1]

    def do(self, message: m.HostMessage) -> m.Accepted:
        """Send a command that has to be accepted."""
        answer = self.ask(message)
        assert isinstance(answer, m.Accepted), (message, answer)
        return answer

    def refusal(self, message: m.HostMessage) -> tuple[int, int]:
        """Send a command that has to be refused: why, and the limit."""
        answer = self.ask(message)
        assert isinstance(answer, m.Refused), (message, answer)
        return answer.why, answer.limit

    @property
    def consent(self) -> tuple[int, int]:
        """Boot and epoch, as of now."""
        return self.board.boot, self.board.epoch

    def notices(self, kind: m.NoticeKind) -> list[m.Notice]:
        """Notices of a kind, in order."""
        return [h for h in self.heard if isinstance(h, m.Notice) and h.kind == kind]

    def readings(self) -> list[m.Reading]:
        """Readings heard so far."""
        return [h for h in self.heard if isinstance(h, m.Reading)]

    def statuses(self) -> list[m.Status]:
        """Statuses heard so far."""
        return [h for h in self.heard if isinstance(h, m.Status)]

    # ---------------------------------------------------------------- ways to get somewhere

    def greet(self, nonce: int = 1) -> m.Identity:
        """Open the conversation."""
        answer = self.ask(m.Greet(nonce=nonce, schema=m.SCHEMA))
        assert isinstance(answer, m.Identity)
        return answer

    def prepare(self, segments: list[tuple[int, int]] | None = None, **limits: int) -> Machine:
        """Greeted, set up, placed at 0, with segments laid; drives off."""
        setup = LIMITS | limits
        self.counts_per_turn = setup["counts_per_turn"]
        self.steps_per_turn = setup["steps_per_turn"]
        self.greet()
        self.do(m.Setup(**setup))
        self.do(m.SetDatum(*self.consent, PROGRAM, 0, 0, 0, 0))
        if segments is None and setup["fitted"] & m.Capability.GUIDE_STEP:
            segments = [(60_000, 300)] * 20
        self.lay(segments or [])
        return self

    def lay(self, segments: list[tuple[int, int]]) -> None:
        """Append segments, as many as needed per Lay."""
        for at in range(0, len(segments), m.SEGMENTS_PER_LAY):
            part = segments[at : at + m.SEGMENTS_PER_LAY]
            self.do(m.Lay(PROGRAM, self.board.line.next, len(part), pack(part).ljust(48, b"\0")))

    def arm(self, pace: int = 6667, stop: int | None = None) -> Machine:
        """Ready, with a pace and perhaps a stop point."""
        self.do(m.Arm(*self.consent))
        self.do(m.Pace(*self.consent, pace))
        if stop is not None:
            self.do(m.StopAt(*self.consent, stop))
        return self

    def go(self) -> Machine:
        """Turning."""
        self.do(m.Go(*self.consent))
        return self

    def winding(self, pace: int = 6667, stop: int | None = None, **limits: int) -> Machine:
        """From nothing to turning at the pace asked for."""
        self.prepare(**limits).arm(pace, stop).go()
        if self.board.fitted & m.Capability.DRIVE_STEP:
            self.run_until(lambda: self.board.spindle.v >= pace)
        return self
