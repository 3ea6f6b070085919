"""A program wound over a bad line by the real core: nothing moves that must not, the guide keeps its path.

The line is that of the conversation's own test (`tests.protocol.chaos`): it loses, flips, repeats and delays.
Besides, the guard is opened, the plug is pulled, the board loses power; and whenever the board has obeyed a
Hold, every command that can move something and was ever said is said to it again.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path
from random import Random
from typing import Protocol

from tests.firmware.chip_bench import ChipBench
from tests.firmware.conformance.benches import spec
from tests.firmware.host_board import HostBoard
from tests.protocol.chaos import HOST_EVERY, Chances, Machine, Operator, Program, Way
from windctl.errors import LinkLost, MachineError
from windctl.machine.plant.plant import Plant
from windctl.machine.twin.signals import ALL_OK, GUARD_OK
from windctl.protocol.conversation import Conversation
from windctl.protocol.frames import FrameReader
from windctl.protocol.messages import MESSAGES, Go, InputBit, Refused, State, Status, decode
from windctl.protocol.picture import BoardPicture
from windctl.protocol.wants import Permission, Wants

LIMIT_TICKS = 300_000
STILL_TICKS = 100  # after what was said again

BAD = Chances(latest_ticks=3000)  # a fifth lost, a fifth flipped, a fifth repeated, a fifth up to 3 s late


@dataclass(frozen=True)
class Accidents:
    """What else may befall, a second."""

    guard: float = 0.06
    unplugged: float = 0.03


class Watched(Protocol):
    """A machine that asserts at every step that nothing moves which must not."""

    program: Program
    tick: int
    position: int
    guide: int
    consents: set[tuple[int, int]]
    starts: list[tuple[int, int]]

    def step(self, received: bytes) -> bytes: ...

    def reboot(self) -> None: ...

    def set_guard(self, *, closed: bool) -> None: ...

    @property
    def at_rest(self) -> tuple[int, int] | None:
        """Boot and epoch, where the machine stands and is not turning."""


class HostMachine(Machine):
    """The core built for this computer, on an ideal plant."""

    def __init__(self, program: Program, queue: int) -> None:
        super().__init__(program, queue)
        self.board = HostBoard(self.board.capabilities, queue)  # type: ignore[assignment]

    def set_guard(self, *, closed: bool) -> None:
        """Opens or closes it."""
        self.inputs.pins = ALL_OK if closed else ALL_OK & ~GUARD_OK

    @property
    def at_rest(self) -> tuple[int, int] | None:
        """Boot and epoch, where the machine stands and is not turning."""
        board = self.board
        if board.state == State.TURNING or not board.standing:
            return None
        return board.boot, board.epoch


class ChipMachine:
    """The real program. Steps, counts and guide steps are edges of its pins; its state is what it sends."""

    def __init__(self, program: Program, elf: Path) -> None:
        self.program = program
        self.bench = bench = ChipBench(elf, Plant(spec(), 1))
        self.consents: set[tuple[int, int]] = set()
        self.starts: list[tuple[int, int]] = []
        self.guide = 0
        self._moves = [  # (count at which it is due, which way)
            (count, step)
            for count in range(1, program.total + 1)
            if (step := program.guide_at(count) - program.guide_at(count - 1))
        ]
        self._made = 0  # of the moves
        self._reader = FrameReader()
        self._status: Status | None = None
        bench.on_guide_step = self._guide_step

    @property
    def tick(self) -> int:
        """Milliseconds so far."""
        return self.bench.ticks

    @property
    def position(self) -> int:
        """Counts, by the encoder's edges."""
        return self.bench.counts_shown

    @property
    def at_rest(self) -> tuple[int, int] | None:
        """Boot and epoch, where the machine stands and is not turning."""
        status = self._status
        if status is None or status.state == State.TURNING or not status.inputs & InputBit.STANDING:
            return None
        return status.boot, status.epoch

    def step(self, received: bytes) -> bytes:
        """One millisecond; the bytes for the host."""
        bench = self.bench
        bench.send(received)
        bench.advance(1)
        assert bench.chip.running
        sent = bench.take()
        for frame in self._reader.feed(sent):
            message = decode(frame.code, frame.body)
            if isinstance(message, Status):
                self._seen(message)
        assert self.position <= self.program.total, "turned past the program's end"
        return sent

    def reboot(self) -> None:
        """The supply dips. The spindle stops; somebody sets the guide to where it belongs."""
        self.bench.brown_out()
        self.bench.plant.spindle.speed = 0
        self._reader = FrameReader()
        self._status = None
        self.guide = self.program.guide_at(self.position)
        self._made = sum(count <= self.position for count, _ in self._moves)

    def set_guard(self, *, closed: bool) -> None:
        """Opens or closes it."""
        self.bench.plant.set_guard(closed=closed)

    def _guide_step(self, step: int) -> None:
        assert self._made < len(self._moves), "the guide went on beyond the program"
        count, due = self._moves[self._made]
        assert step == due, "the guide left the program's path"
        assert self.position >= count, "the guide was ahead of the spindle"
        self._made += 1
        self.guide += step

    def _seen(self, status: Status) -> None:
        before, self._status = self._status, status
        if status.state == State.TURNING and (before is None or before.state != State.TURNING):
            start = (status.boot, status.epoch)
            assert start in self.consents, f"started for {start}: nobody consented"
            assert start not in self.starts, f"started twice for {start}"
            self.starts.append(start)
        if status.inputs & InputBit.STANDING:
            assert self.guide == status.guide or not status.trust
            assert not status.trust or self.guide == self.program.guide_at(status.count)


class Patient(Operator):
    """Closes the guard again, and then clears the trip by a word of his own."""

    def __init__(self, machine: Watched, random: Random, chances: Chances, accidents: Accidents) -> None:
        super().__init__(machine, random, chances)  # type: ignore[arg-type]
        self._watched = machine
        self._accidents = accidents
        self._closes_at = 0
        self._clearing: Permission | None = None
        self.trips = 0

    def wants(self, picture: BoardPicture) -> Wants:
        """As an operator; the guard may come open on the way."""
        random, machine = self.random, self._watched
        if self._closes_at and machine.tick >= self._closes_at:
            machine.set_guard(closed=True)
            self._closes_at = 0
        elif not self._closes_at and random.random() < self._accidents.guard * HOST_EVERY / 1000.0:
            machine.set_guard(closed=False)
            self._closes_at = machine.tick + random.randrange(20, 700)
        wants = super().wants(picture)
        status, present = picture.status, picture.permission
        if status is None or status.state != State.TRIPPED:
            self._clearing = None
            return wants
        if self._clearing != present:
            self._clearing = None
        if self._clearing is None and not self._closes_at and picture.stands and random.random() < 0.05:
            self._clearing = present
            self.trips += 1
        return replace(wants, armed=None, go=None, disarmed=False, clear_trip=self._clearing)


def wind(
    seed: int,
    machine_for: Callable[[Random], Watched],
    chances: Chances = BAD,
    accidents: Accidents | None = None,
) -> Counter[str]:
    """Wind one program. Fails if what must not move moves, or the coil does not get done."""
    accidents = accidents or Accidents()
    random = Random(seed)
    machine = machine_for(random)
    program = machine.program
    operator = Patient(machine, random, chances, accidents)
    counts: Counter[str] = Counter()
    down, up = Way(random, chances, counts), Way(random, chances, counts)
    nonces = iter(lambda: random.getrandbits(32), None)
    talk = Conversation(nonces)
    said = FrameReader()
    moving: dict[bytes, None] = {}  # every frame that can move something
    again_for = 0  # the hold after which they were said again
    while machine.tick < LIMIT_TICKS:
        tick = machine.tick
        up.put(machine.step(down.pull(tick)), tick)
        if tick > 1000 and random.random() < chances.reboot / 1000.0:
            machine.reboot()
            counts["power lost"] += 1
        if tick % HOST_EVERY:
            continue
        if random.random() < accidents.unplugged * HOST_EVERY / 1000.0:
            talk = Conversation(nonces)
            counts["unplugged"] += 1
        for message in talk.receive(up.pull(tick), tick / 1000.0):
            if isinstance(message, Refused):
                operator.refused(message)
        try:
            data = talk.advance(operator.wants(talk.board), tick / 1000.0)
        except (LinkLost, MachineError):
            counts["links lost"] += 1
            talk = Conversation(nonces)
            continue
        for stretch in data.split(b"\0"):
            for frame in said.feed(stretch + b"\0"):
                counts["go sent"] += frame.code == Go.CODE
                if getattr(MESSAGES[frame.code], "MOVES", False):
                    moving[stretch + b"\0"] = None
        down.put(data, tick)
        rest = machine.at_rest
        holding = tick < operator.holding_until and again_for != operator.holds
        if holding and rest is not None and rest not in machine.consents:
            again_for = operator.holds
            counts["said again"] += _say_again(machine, list(moving), up)
            counts["holds"] += 1
        if machine.position == program.total and talk.board.stands:
            assert machine.guide == program.guide_at(program.total)
            counts["starts"] += len(machine.starts)
            counts["trips cleared"] += operator.trips
            counts["milliseconds"] += tick
            counts["coils"] += 1
            return counts
    raise AssertionError(
        f"not done after {LIMIT_TICKS / 1000:.0f} s: at {machine.position} of {program.total}, "
        f"{talk.board}, {dict(counts)}"
    )


def _say_again(machine: Watched, frames: list[bytes], up: Way) -> int:
    """All of them to a board that obeyed a Hold and stands: nothing moves. Returns how many."""
    before = (machine.position, machine.guide, len(machine.starts))
    for frame in frames:
        up.put(machine.step(frame), machine.tick)
        up.put(machine.step(b""), machine.tick)
    for _ in range(STILL_TICKS):
        up.put(machine.step(b""), machine.tick)
    assert (machine.position, machine.guide, len(machine.starts)) == before, "an old command moved something"
    return len(frames)


def many(seeds: range, machine_for: Callable[[Random], Watched], chances: Chances = BAD) -> Counter[str]:
    """All of it together, printed: `pytest -s` or a failure shows what befell."""
    total: Counter[str] = Counter()
    for seed in seeds:
        try:
            total += wind(seed, machine_for, chances)
        except AssertionError as error:
            raise AssertionError(f"with seed {seed}: {error}") from error
    print("; ".join(f"{what} {n}" for what, n in sorted(total.items())))
    return total


def on_core(random: Random) -> HostMachine:
    """The core built for this computer, with a queue of either length."""
    return HostMachine(Program(random), queue=random.choice([16, 64]))
