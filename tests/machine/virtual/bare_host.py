"""A host of a few lines: it speaks the protocol's frames straight, so a bench needs no other to be tested."""

from __future__ import annotations

import struct
from collections.abc import Callable
from dataclasses import replace

from windctl.machine.plant.faults import Faults
from windctl.machine.plant.plant import Plant
from windctl.machine.plant.spec import PlantSpec
from windctl.machine.twin.board import Board
from windctl.machine.virtual.bench import Bench
from windctl.protocol import messages as m
from windctl.protocol.frames import FrameReader, encode

PROGRAM = 0x1234
PITCH_STEPS = 44  # 0.22 mm of a guide with 200 steps per mm
STROKE_STEPS = 2080  # 10.4 mm
SETUP = m.Setup(
    coil_token=7,
    counts_per_turn=400,
    steps_per_turn=400,
    max_count=10_000 * 400,
    max_pace=10_000,
    accel=2000,
    decel=3333,
    guide_min=-50,
    guide_max=2200,
    slip_counts=20,
    reverse_counts=20,
    tension_low=3000,
    tension_high=30_000,
    fitted=int(m.Capability.DRIVE_STEP | m.Capability.GUIDE_STEP | m.Capability.INDEX | m.Capability.TENSION),
    rotation=0,
)


def setup_for(spec: PlantSpec) -> m.Setup:
    """`SETUP`, fitted as `spec` is."""
    fitted = int(m.Capability.TENSION) if spec.tension_sensor else 0
    fitted |= int(m.Capability.DRIVE_STEP) if spec.drive else 0
    fitted |= int(m.Capability.GUIDE_STEP) if spec.guide else 0
    fitted |= int(m.Capability.INDEX) if spec.index else 0
    return replace(
        SETUP,
        counts_per_turn=spec.counts_per_turn,
        steps_per_turn=spec.steps_per_turn,
        max_count=10_000 * spec.counts_per_turn,
        fitted=fitted,
    )


class AskRefusedError(AssertionError):
    """The board refused a command that the test expected it to take."""

    def __init__(self, message: m.Message, refused: m.Refused) -> None:
        self.why = m.Refusal(refused.why)
        super().__init__(f"{message} refused: {self.why.name}, limit {refused.limit}")


class BareHost:
    """Talks over two callables: `send(bytes)`, and `wait(ticks) -> bytes` which lets time pass."""

    def __init__(self, send: Callable[[bytes], None], wait: Callable[[int], bytes]) -> None:
        self._send = send
        self._wait = wait
        self._reader = FrameReader()
        self._sequence = 0
        self._beat_in = 0
        self._laid = 0
        self._guide, self._way = 0, 1
        self.beating = True
        self.heard: list[m.Message] = []
        self.status: m.Status | None = None

    @property
    def readings(self) -> list[m.Reading]:
        return [message for message in self.heard if isinstance(message, m.Reading)]

    def pass_time(self, ticks: int) -> list[m.Message]:
        """Listens for so many ticks, beating twice a second."""
        came: list[m.Message] = []
        while ticks > 0:
            step = min(ticks, 10)
            ticks -= step
            self._beat_in -= step
            if self.beating and self._beat_in <= 0:
                self._beat_in = 500
                self._send(encode(m.Beat.CODE, 0, b""))
            for frame in self._reader.feed(self._wait(step)):
                message = m.decode(frame.code, frame.body)
                came.append(message)
                if isinstance(message, m.Status):
                    self.status = message
        self.heard += came
        return came

    def greet(self) -> m.Identity:
        """Opens the conversation."""
        self._sequence = 0
        self._send(b"\0" + encode(m.Greet.CODE, 0, m.Greet(99, m.SCHEMA).encode_body()))
        for _ in range(50):
            for message in self.pass_time(10):
                if isinstance(message, m.Identity):
                    self._laid = message.next
                    self.pass_time(60)
                    return message
        raise AssertionError("the board does not answer a Greet")

    def ask(self, message: m.Message) -> m.Accepted:
        """Sends a numbered command and expects it accepted."""
        self._sequence = (self._sequence + 1) & 0xFF
        self._send(encode(message.CODE, self._sequence, message.encode_body()))
        for _ in range(50):
            for answer in self.pass_time(10):
                if isinstance(answer, m.Refused):
                    raise AskRefusedError(message, answer)
                if isinstance(answer, m.Accepted) and answer.command == message.CODE:
                    self.pass_time(60)
                    return answer
        raise AssertionError(f"no answer to {message}")

    @property
    def permission(self) -> tuple[int, int]:
        """Boot and epoch of the last Status."""
        assert self.status is not None
        return self.status.boot, self.status.epoch

    def make_ready(self, setup: m.Setup = SETUP, *, count: int = 0, guide: int = 0, turns: int = 120) -> None:
        """From drives off to ready, at a place of the program that begins there; `turns` of it are laid."""
        self.ask(setup)
        self.ask(m.SetDatum(*self.permission, PROGRAM, count, guide, 0, 0))
        self._laid, self._guide, self._way = 0, guide, 1
        if setup.fitted & m.Capability.GUIDE_STEP:
            self.lay(turns)
        self.ask(m.Arm(*self.permission))

    def go(self, stop_count: int, pace: int = 6667) -> None:
        """Sets pace and stop point, and starts."""
        self.ask(m.Pace(*self.permission, pace))
        self.ask(m.StopAt(*self.permission, stop_count))
        self.ask(m.Go(*self.permission))

    def lay(self, turns: int) -> None:
        """Lays so many turns of an even lay, one segment a turn."""
        while turns > 0:
            n = min(turns, m.SEGMENTS_PER_LAY)
            packed = b""
            for _ in range(n):
                if not 0 <= self._guide + self._way * PITCH_STEPS <= STROKE_STEPS:
                    self._way = -self._way
                packed += struct.pack("<Hh", 400, self._way * PITCH_STEPS)
                self._guide += self._way * PITCH_STEPS
            self.ask(m.Lay(PROGRAM, self._laid, n, packed.ljust(48, b"\0")))
            self._laid += n
            turns -= n

    def wind_until_held(self, most_ticks: int = 2_000_000) -> m.Status:
        """Feeds the queue and listens until the board turns no more."""
        while most_ticks > 0:
            self.pass_time(50)
            most_ticks -= 50
            status = self.status
            assert status is not None
            if status.state != m.State.TURNING and status.speed == 0:
                return status
            if status.next - status.executing < 100 and self._laid:
                try:
                    self.lay(24)
                except AskRefusedError as refused:
                    if refused.why != m.Refusal.STATE:  # it stopped meanwhile
                        raise
        raise AssertionError("the board turns for ever")


def bench_of(
    spec: PlantSpec, seed: int = 1, *, plant: Plant | None = None, faults: Faults | None = None
) -> Bench:
    """A bench with everything the spec has."""
    capabilities = int(m.Capability.VIRTUAL | m.Capability.THERMOMETER | m.Capability.CONTACT)
    capabilities |= setup_for(spec).fitted | int(m.Capability.PEDAL)
    board = Board(
        capabilities=capabilities, contact_scale=spec.milliohm_per_unit, tension_scale=spec.tension_unit
    )
    return Bench(board, plant or Plant(spec, seed, faults=faults))


def host_of(bench: Bench) -> BareHost:
    """A host on the bench's own line."""

    def wait(ticks: int) -> bytes:
        bench.advance(ticks)
        return bench.take()

    return BareHost(bench.send, wait)
