"""Random ticks: boards, machines and hosts drawn from a seed, recorded; and what of it they reached."""

from __future__ import annotations

import random
from collections import Counter

from tests.firmware.trace import RecordedBoard, Trace
from tests.firmware.wild_host import WildHost
from tests.firmware.wild_plant import WildPlant
from windctl.machine.twin.board import EVERYTHING
from windctl.machine.twin.signals import Inputs, Outputs
from windctl.protocol import messages as m
from windctl.protocol.frames import FrameReader
from windctl.protocol.messages import Capability


class Reached:
    """What the board said, counted: states with their causes, trips, answers, notices, kinds of reading."""

    def __init__(self) -> None:
        self.states: Counter[int] = Counter()
        self.causes: Counter[int] = Counter()
        self.trips: Counter[int] = Counter()
        self.notices: Counter[int] = Counter()
        self.readings: Counter[int] = Counter()
        self.refusals: Counter[int] = Counter()
        self.answers: Counter[tuple[int, int]] = Counter()  # (command, 0 or why not)
        self.frames = 0
        self.turning_ticks = 0
        self._reader = FrameReader()

    def note(self, sent: bytes) -> None:
        """What the board sent in a tick."""
        for frame in self._reader.feed(sent):
            message = m.decode(frame.code, frame.body)
            self.frames += 1
            if isinstance(message, m.Status):
                self.states[message.state] += 1
                self.causes[message.cause] += 1
                self.trips[message.trip] += 1
            elif isinstance(message, m.Accepted):
                self.answers[message.command, 0] += 1
            elif isinstance(message, m.Refused):
                self.answers[message.command, message.why] += 1
                self.refusals[message.why] += 1
            elif isinstance(message, m.Notice):
                self.notices[message.kind] += 1
            elif isinstance(message, m.Reading):
                self.readings[message.flags] += 1

    def report(self) -> str:
        """The counts, for people."""
        names = {
            "states": (self.states, m.State),
            "causes": (self.causes, m.Cause),
            "trips": (self.trips, m.Trip),
            "notices": (self.notices, m.NoticeKind),
            "refusals": (self.refusals, m.Refusal),
        }
        lines = [f"{self.frames} frames sent, {self.turning_ticks} ticks turning"]
        for title, (counts, enum) in names.items():
            lines.append(title + ": " + ", ".join(f"{e.name.lower()} {counts[e]}" for e in enum))
        lines.append(f"kinds of reading: {dict(self.readings)}; kinds of answer: {len(self.answers)}")
        return "\n".join(lines)


def wild_ticks(seed: int, ticks: int, trace: Trace, reached: Reached, queue: int = 128) -> None:
    """Record at least so many ticks of one episode after the other."""
    end = trace.ticks + ticks
    while trace.ticks < end:
        rng = random.Random(seed)
        seed += 1
        _episode(rng, rng.choice((500, 2000, 6000)), trace, reached, queue)


def _episode(rng: random.Random, ticks: int, trace: Trace, reached: Reached, queue: int) -> None:
    capabilities = rng.choice((EVERYTHING, EVERYTHING, EVERYTHING ^ Capability.PEDAL, rng.getrandbits(8)))
    board = RecordedBoard(
        trace,
        capabilities=int(capabilities),
        queue=queue,
        boot_number=rng.choice((1, 0xFFFF, rng.getrandbits(16))),
        contact_scale=rng.getrandbits(16),
        tension_scale=rng.getrandbits(16),
    )
    if rng.random() < 0.3:
        board.age(0xFFFFFFFF - rng.randrange(ticks), 0xFFFF - rng.randrange(8))
    plant = WildPlant(rng, faults=rng.choice((0, 30, 300)))
    host = WildHost(rng, board, plant)
    inputs, outputs = Inputs(), Outputs()
    reboot_at = rng.randrange(10 * ticks)
    break_at = rng.randrange(10 * ticks)
    for at in range(ticks):
        if at == reboot_at:
            board.reboot()
        if at == break_at:
            board.set_state(rng.choice((5, 32, 77, 255)))
        inputs.received = host.bytes_for_tick()
        board.tick(inputs, outputs)
        if outputs.sent:
            reached.note(outputs.sent)
        if board.state == m.State.TURNING:
            reached.turning_ticks += 1
        plant.step(outputs, inputs)
