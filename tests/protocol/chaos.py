"""A line that loses, flips, repeats and delays, between the conversation and the virtual board.

The plant is ideal: every step is a count, every guide step is made. An operator who never tires gives
consents, now and then asks for a hold, forgets to beat, or sees the board started again.
"""

from __future__ import annotations

import heapq
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, replace
from random import Random

from windctl.errors import LinkLost, MachineError
from windctl.machine.twin.board import Board
from windctl.machine.twin.signals import Inputs, Outputs
from windctl.protocol.conversation import Conversation
from windctl.protocol.frames import FrameReader
from windctl.protocol.messages import Capability, Go, Refused, Setup, State, Trust
from windctl.protocol.picture import BoardPicture
from windctl.protocol.wants import Datum, Permission, Sampling, Segments, Wants

PROGRAM_ID = 0xA1B2C3D4
MAX_PACE = 4000
HOST_EVERY = 5  # ticks between two rounds of the host
LIMIT_TICKS = 180_000
KNOWN = Trust.COUNT | Trust.GUIDE


@dataclass(frozen=True, slots=True)
class Chances:
    """What may befall each frame, and each second of the run."""

    lost: float = 0.2
    flipped: float = 0.2
    repeated: float = 0.2
    delayed: float = 0.2
    latest_ticks: int = 400
    hold: float = 0.4  # a second
    silence: float = 0.04
    reboot: float = 0.03


class Way:
    """One direction of the line. Delayed frames are overtaken by later ones."""

    def __init__(self, random: Random, chances: Chances, counts: Counter[str]) -> None:
        self._random, self._chances, self._counts = random, chances, counts
        self._flying: list[tuple[int, int, bytes]] = []
        self._n = 0

    def put(self, data: bytes, tick: int) -> None:
        for stretch in data.split(b"\0"):
            if stretch:
                self._frame(stretch + b"\0", tick)

    def pull(self, tick: int) -> bytes:
        arrived = b""
        while self._flying and self._flying[0][0] <= tick:
            arrived += heapq.heappop(self._flying)[2]
        return arrived

    def _frame(self, frame: bytes, tick: int) -> None:
        random, chances = self._random, self._chances
        self._counts["frames"] += 1
        copies = 1
        if random.random() < chances.repeated:
            self._counts["repeated"] += 1
            copies = 2
        for _ in range(copies):
            if random.random() < chances.lost:
                self._counts["lost"] += 1
                continue
            sent, delay = frame, 2
            if random.random() < chances.flipped:
                self._counts["flipped"] += 1
                sent = flip(frame, random)
            if random.random() < chances.delayed:
                self._counts["delayed"] += 1
                delay = random.randrange(3, chances.latest_ticks)
            self._n += 1
            heapq.heappush(self._flying, (tick + delay, self._n, sent))


def flip(frame: bytes, random: Random) -> bytes:
    """One to three bits of it inverted."""
    damaged = bytearray(frame)
    for _ in range(random.randint(1, 3)):
        bit = random.randrange(8 * len(frame))
        damaged[bit // 8] ^= 1 << bit % 8
    return bytes(damaged)


class Program:
    """A short random program, and where the guide belongs at each count: the specification's formula."""

    def __init__(self, random: Random) -> None:
        self.segments: list[tuple[int, int]] = []
        guide = 0
        for _ in range(random.randint(30, 60)):
            counts = random.randint(20, 160)
            steps = random.randint(-counts // 3, counts // 3)
            if abs(guide + steps) > 900:
                steps = -steps
            guide += steps
            self.segments.append((counts, steps))
        self.total = sum(counts for counts, _ in self.segments)
        packed = b"".join(
            counts.to_bytes(2, "little") + steps.to_bytes(2, "little", signed=True)
            for counts, steps in self.segments
        )
        self.wire = Segments(PROGRAM_ID, packed)
        self._line = list(self._points())

    def guide_at(self, count: int) -> int:
        """Guide steps from the start, at a count from 0 to total."""
        return self._line[count]

    def place_of(self, count: int) -> tuple[int, int]:
        """Segment and counts into it."""
        for index, (counts, _) in enumerate(self.segments):
            if count < counts:
                return index, count
            count -= counts
        return len(self.segments), 0

    def _points(self) -> Iterator[int]:
        begins = 0
        for counts, steps in self.segments:
            sign = 1 if steps >= 0 else -1
            for k in range(counts):
                yield begins + sign * ((k * abs(steps) + counts // 2) // counts)
            begins += steps
        yield begins


class Machine:
    """The virtual board on an ideal plant, watched: it may start only what was consented to, and once."""

    def __init__(self, program: Program, queue: int) -> None:
        fitted = Capability.DRIVE_STEP | Capability.GUIDE_STEP | Capability.CONTACT | Capability.VIRTUAL
        self.board = Board(capabilities=int(fitted), queue=queue)
        self.program = program
        self.tick = 0
        self.position = 0  # true counts
        self.guide = 0  # true guide steps
        self.consents: set[tuple[int, int]] = set()
        self.starts: list[tuple[int, int]] = []
        self.inputs, self.outputs = Inputs(), Outputs()
        self.watched = True
        self._owed = 0
        self._state = self.board.state

    def step(self, received: bytes) -> bytes:
        """One millisecond; the bytes for the host."""
        inputs, outputs, board = self.inputs, self.outputs, self.board
        self.tick += 1
        self._owed += outputs.rate
        steps, self._owed = divmod(self._owed, 1000)
        inputs.steps_issued = inputs.count_delta = steps
        inputs.received = received
        inputs.contact = 1000
        self.position += steps
        board.tick(inputs, outputs)
        self.guide += outputs.guide_steps
        if self.watched:
            self._watch(steps)
        return outputs.sent

    def reboot(self) -> None:
        """Power off and on. The ideal spindle stops where it is."""
        self.board.reboot()
        self.outputs.rate = self._owed = 0
        self._state = self.board.state

    def _watch(self, steps: int) -> None:
        board, state = self.board, self.board.state
        if state == State.TURNING != self._state:
            start = (board.boot, board.epoch)
            assert start in self.consents, f"started for {start}: nobody consented"
            assert start not in self.starts, f"started twice for {start}"
            self.starts.append(start)
        self._state = state
        if steps or self.outputs.guide_steps:
            assert self.position <= self.program.total, "turned past the program's end"
            assert self.guide == self.program.guide_at(self.position), "the guide left the program's line"
        if board.trust == KNOWN:
            assert board.count == self.position, "the board lost count"


class Operator:
    """Wants this program wound; consents when the board is ready, holds now and then."""

    def __init__(self, machine: Machine, random: Random, chances: Chances) -> None:
        self.machine, self.random, self.chances = machine, random, chances
        self.setup = Setup(
            coil_token=7,
            counts_per_turn=400,
            steps_per_turn=400,
            max_count=machine.program.total,
            max_pace=MAX_PACE,
            accel=8000,
            decel=12000,
            guide_min=-1000,
            guide_max=1000,
            slip_counts=50,
            reverse_counts=10,
            tension_low=0,
            tension_high=0xFFFF,
            fitted=int(Capability.DRIVE_STEP | Capability.GUIDE_STEP),
            rotation=0,
        )
        self.holding_until = self.silent_until = 0
        self.consent: Permission | None = None
        self.pace = MAX_PACE
        self.stop = random.randint(1, machine.program.total)
        self.holds = 0

    def refused(self, refused: Refused) -> None:
        """Ask anew later."""
        if refused.command == Go.CODE:
            self.consent = None

    def wants(self, picture: BoardPicture) -> Wants:
        random, chances, machine = self.random, self.chances, self.machine
        tick, total = machine.tick, machine.program.total
        a_round = HOST_EVERY / 1000.0
        if random.random() < chances.hold * a_round:
            self.holding_until = tick + random.randrange(50, 600)
            self.holds += 1
        if random.random() < chances.silence * a_round:
            self.silent_until = tick + random.randrange(500, 3500)
        if random.random() < 1.0 * a_round:
            self.pace = random.randint(300, MAX_PACE)
        status = picture.status
        wants = Wants(
            beat=tick >= self.silent_until,
            setup=self.setup,
            program=machine.program.wire,
            sampling=Sampling(100, 200),
        )
        if tick < self.holding_until:
            self.consent = None
            return replace(wants, hold=True)
        present = picture.permission
        if status is None or present is None:
            return wants
        placed = status.trust == KNOWN and picture.program == PROGRAM_ID
        if not placed:
            off = status.state == State.DRIVES_OFF
            index, into = machine.program.place_of(machine.position)
            datum = Datum(machine.position, machine.guide, index, into, present)
            return replace(wants, disarmed=not off, datum=datum if off else None)
        if picture.stands and status.count >= self.stop:
            self.stop = random.choice([total, random.randint(min(total, status.count + 1), total)])
        if self.consent is None and picture.stands and random.random() < 0.2:
            self.consent = present
            machine.consents.add((present.boot, present.epoch))
        elif self.consent is not None and self.consent != present:
            self.consent = None  # void: to be given anew
        off = status.state == State.DRIVES_OFF
        return replace(
            wants,
            armed=self.consent if off else None,
            go=None if off else self.consent,
            pace=self.pace,
            stop_point=self.stop,
        )


def wind(seed: int, chances: Chances) -> Counter[str]:
    """Wind one program over a bad line. Fails if what must not move moves, or the coil does not get done."""
    random = Random(seed)
    program = Program(random)
    machine = Machine(program, queue=random.choice([8, 16, 64]))
    operator = Operator(machine, random, chances)
    counts: Counter[str] = Counter()
    down, up = Way(random, chances, counts), Way(random, chances, counts)
    nonces = iter(lambda: random.getrandbits(32), None)
    talk = Conversation(nonces)
    sent = FrameReader()
    while machine.tick < LIMIT_TICKS:
        tick = machine.tick
        up.put(machine.step(down.pull(tick)), tick)
        if tick > 1000 and random.random() < chances.reboot / 1000.0:
            machine.reboot()
            counts["reboots"] += 1
        if tick % HOST_EVERY:
            continue
        for message in talk.receive(up.pull(tick), tick / 1000.0):
            if isinstance(message, Refused):
                operator.refused(message)
        try:
            data = talk.advance(operator.wants(talk.board), tick / 1000.0)
        except (LinkLost, MachineError):  # MachineError: the first greeting had no luck
            counts["links lost"] += 1
            counts["retries"] += talk.counters.retries
            talk = Conversation(nonces)  # frames of the old one are still on their way
            continue
        counts["go sent"] += sum(frame.code == Go.CODE for frame in sent.feed(data))
        down.put(data, tick)
        if machine.position == program.total and talk.board.stands:
            assert machine.guide == program.guide_at(program.total)
            counts["retries"] += talk.counters.retries
            counts["late or repeated"] += talk.counters.dropped
            counts["starts"] += len(machine.starts)
            counts["holds"] += operator.holds
            counts["milliseconds"] += tick
            counts["coils"] += 1
            return counts
    raise AssertionError(
        f"not done after {LIMIT_TICKS / 1000:.0f} s: at {machine.position} of {program.total}, "
        f"board {machine.board.state}, {talk.board}, {dict(counts)}"
    )
