"""The emulated chip in the virtual machine's place: the same plant, wired to the pins edge by edge."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Final

from tests.firmware.chip import CYCLES_PER_TICK, HZ, VOLTS, Chip
from windctl.machine.plant.plant import Plant
from windctl.machine.plant.spindle import Spindle
from windctl.machine.twin.signals import (
    GUARD_OK,
    GUIDE_HIGH_OK,
    GUIDE_LOW_OK,
    PEDAL_DOWN,
    STOP_OK,
    Inputs,
    Outputs,
)
from windctl.machine.virtual.line import SerialLine

CONTACT_MILLIOHM: Final = 305  # per unit, as pins.h has it
_SLACK: Final = 200  # cycles before a tick at which the plant's own millisecond begins
_ADAPTER_BYTES: Final = 62
_PAUSE: Final = 1400  # cycles without a byte, a little more than one takes: the line is idle
_PHASES: Final = ((0, 0), (1, 0), (1, 1), (0, 1))  # channels A, B as the encoder turns clockwise


class SteppedSpindle(Spindle):
    """The plant's spindle, turned by the edges of the step pin instead of a rate."""

    __slots__ = ("edges", "interval", "last_edge", "moved")

    def __init__(self, like: Spindle, steps_per_turn: int) -> None:
        del like
        super().__init__(steps_per_turn)
        self.edges = 0
        self.moved = 0
        self.last_edge = 0
        self.interval = 0  # cycles

    def edge(self, cycle: int, *, powered: bool) -> int:
        """One step of the motor; returns those that the spindle follows."""
        self.edges += 1
        self.interval = cycle - self.last_edge
        self.last_edge = cycle
        if not powered:
            return 0
        self._slip_acc += self._slip_grip
        moved = self._slip_acc // 1000
        self._slip_acc -= moved * 1000
        self.moved += moved
        return moved

    def advance(self, rate: int, powered: bool | int) -> int:
        """One tick, whose edges have come."""
        self.issued, self.edges = self.edges, 0
        moved, self.moved = self.moved, 0
        if powered:
            self.speed = rate * self._slip_grip // 1000
            return moved
        return moved + self._otherwise(0, 0, powered)


class ChipBench:
    """`Bench`'s face: one machine, switched on; a millisecond a tick, and tick 1 is the chip's first."""

    def __init__(self, elf: Path, plant: Plant, line: SerialLine | None = None) -> None:
        self.plant = plant
        self.line = line or SerialLine()
        self.inputs = Inputs()
        self.outputs = Outputs()
        self.ticks = 0
        self.watch: Callable[[bytes], None] | None = None
        self.steps = 0  # edges of the step pin
        self.counts_shown = 0  # by the encoder
        self.guide_steps = 0  # edges of the guide's step pin, signed
        self.worst_busy = 0  # cycles
        self.busy = 0  # cycles in all
        self.begun_at = 0  # cycle
        self.last_step_at = 0  # cycle
        self.on_step: Callable[[int], None] = lambda cycle: None
        self.frames_out: list[float] = []  # ms, as `ticks` count them: when each frame's last byte was out
        self.on_guide_step: Callable[[int], None] = lambda step: None
        self._arrived = bytearray()
        self._coming = bytearray()
        self._came_at = 0
        self._busy_since = 0
        self._guide_now = 0
        self._shown = 0  # motor steps that the encoder has followed
        spec = plant.spec
        self._counts, self._per_turn = spec.counts_per_turn, spec.steps_per_turn
        self._index_place = plant._index_at % spec.steps_per_turn if spec.index else -1
        self._index_on = False
        self._levels: dict[str, bool] = {}
        self._spindle = SteppedSpindle(plant.spindle, spec.steps_per_turn)
        plant.spindle = self._spindle
        self.chip = chip = Chip(elf)
        chip.on_change("step", self._step)
        chip.on_change("guide_step", self._guide_step)
        chip.on_change("busy", self._busy)
        chip.on_byte(self._byte)
        chip.set("a", 0)
        chip.set("b", 0)
        chip.set("index", 0)
        chip.set_volts("contact", 0.0)
        chip.set_volts("tension", 0.0)
        chip.set_volts("celsius", 0.73)
        self._show_pins(STOP_OK | GUARD_OK | GUIDE_LOW_OK | GUIDE_HIGH_OK)
        self._boot()

    def _boot(self) -> None:
        """Lets the chip start, up to the beginning of its first tick."""
        self._busy_since = 0
        while not self._busy_since:
            assert self.chip.running
            self.chip.run(20)
        self._next = self._busy_since + CYCLES_PER_TICK - _SLACK
        self._first_tick_at = self._busy_since - self.ticks * CYCLES_PER_TICK

    # ------------------------------------------------------------ Bench's face

    def advance(self, ticks: int, *, until_byte: bool = False) -> int:
        """Lets `ticks` pass; `until_byte` ends with the first byte for the host. Returns those passed."""
        chip, plant, inputs, outputs = self.chip, self.plant, self.inputs, self.outputs
        to_board = self.line.to_board
        passed = 0
        while passed < ticks:
            passed += 1
            self.ticks += 1
            received = to_board.pull(self.ticks) if to_board.busy else b""
            if received:
                chip.send(received)
            self._play()
            chip.run_to(self._next)
            self._next += CYCLES_PER_TICK
            outputs.drive_enable = chip.high("drive_enable")
            outputs.guide_steps, self._guide_now = self._guide_now, 0
            outputs.rate = self._rate()
            plant.step(outputs, inputs)
            self._show()
            if self.watch is not None:
                self.watch(received)
            if self._coming and (len(self._coming) >= _ADAPTER_BYTES or chip.cycle - self._came_at > _PAUSE):
                self._arrived += self._coming
                self._coming.clear()
                if until_byte:
                    break
        return passed

    def send(self, data: bytes) -> None:
        """Bytes from the host, onto the line."""
        if data:
            self.line.to_board.put(data)

    def take(self) -> bytes:
        """Bytes that have arrived at the host since the last call."""
        arrived = bytes(self._arrived)
        self._arrived.clear()
        return arrived

    def brown_out(self) -> None:
        """The supply dips: the chip starts anew, its memory stays, and a turning spindle coasts."""
        self.line.clear()
        self._coming.clear()
        self.chip.brown_out()
        self._boot()

    @property
    def load(self) -> float:
        """Part of the time in which the processor works on ticks, interrupts in them included."""
        return self.busy / (self.chip.cycle - self.begun_at)

    def begin_measuring(self) -> None:
        """Forgets the busy times so far."""
        self.worst_busy = self.busy = 0
        self.begun_at = self.chip.cycle

    # ------------------------------------------------------------ what the chip does

    def _byte(self, byte: int) -> None:
        self._coming.append(byte)
        self._came_at = cycle = self.chip.cycle
        if byte == 0:
            self.frames_out.append(1.0 + (cycle - self._first_tick_at) / CYCLES_PER_TICK)

    def _busy(self, high: bool) -> None:
        cycle = self.chip.cycle
        if high:
            self._busy_since = cycle
        else:
            took = cycle - self._busy_since
            self.busy += took
            self.worst_busy = max(self.worst_busy, took)

    def _step(self, high: bool) -> None:
        if not high:
            return
        self.steps += 1
        self.last_step_at = cycle = self.chip.cycle
        self.on_step(cycle)
        powered = self.chip.high("drive_enable") and bool(self.plant._pins & STOP_OK)
        moved = self._spindle.edge(cycle, powered=powered)
        if moved:
            self._turn(moved)

    def _guide_step(self, high: bool) -> None:
        if high:
            step = -1 if self.chip.high("guide_way") else 1
            self.guide_steps += step
            self._guide_now += step
            self.on_guide_step(step)

    def _rate(self) -> int:
        """Steps per second, as they come at present."""
        spindle = self._spindle
        since = max(self.chip.cycle - spindle.last_edge, spindle.interval)
        if not spindle.interval or since > 2 * spindle.interval + CYCLES_PER_TICK:
            return 0
        return round(HZ / spindle.interval)

    # ------------------------------------------------------------ what the chip sees

    def _turn(self, moved: int) -> None:
        """The encoder's shaft turns by so many motor steps, winding counted up."""
        way = 1 if moved > 0 else -1
        for _ in range(abs(moved)):
            self._shown += way
            count = self._shown * self._counts // self._per_turn
            while count != self.counts_shown:
                self.counts_shown += way
                if not self.plant._stuck:
                    phase = -self.counts_shown if self.chip.high("way") else self.counts_shown
                    a, b = _PHASES[phase & 3]
                    self._level("a", bool(a))
                    self._level("b", bool(b))
            at_index = self._shown % self._per_turn == self._index_place and not self.plant._index_lost
            if at_index != self._index_on:
                self._index_on = at_index
                self.chip.set("index", at_index)

    def _play(self) -> None:
        """What the spindle did without its motor in the last millisecond, shown within this one."""
        missing = self.plant.position - self._shown
        part = CYCLES_PER_TICK // (abs(missing) + 1)
        for left in range(abs(missing), 0, -1):
            self.chip.run_to(self._next - left * part)
            self._turn(1 if missing > 0 else -1)

    def _show(self) -> None:
        inputs = self.inputs
        self._show_pins(inputs.pins)
        ohm_units = inputs.contact * self.plant.spec.milliohm_per_unit / CONTACT_MILLIOHM
        # noise of one step of the converter, without which oversampling gains nothing
        noise = self.ticks * 25 % 64
        open_ = inputs.contact == 0xFFFF
        self.chip.set_volts("contact", VOLTS if open_ else (ohm_units + noise) * VOLTS / 65536.0)
        self.chip.set_volts("tension", (inputs.tension + noise) * VOLTS / 65536.0)
        self.chip.set_volts("celsius", 0.5 + inputs.celsius_centi / 10_000.0)

    def _show_pins(self, pins: int) -> None:
        self._level("stop", not pins & STOP_OK)
        self._level("guard", not pins & GUARD_OK)
        self._level("guide_low", not pins & GUIDE_LOW_OK)
        self._level("guide_high", not pins & GUIDE_HIGH_OK)
        self._level("pedal", not pins & PEDAL_DOWN)

    def _level(self, name: str, high: bool) -> None:
        if self._levels.get(name) != high:
            self._levels[name] = high
            self.chip.set(name, high)
