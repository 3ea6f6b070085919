"""The physical world behind a board, a millisecond at a time: spindle, guide, wire, and a coil that grows.

`step` stands for the hardware under the firmware: it takes what the board asked for and makes what the
board sees next. Whatever changes slowly is worked out once per turn or once per block of ticks; a quiet tick
is a few sums and table look-ups, because a whole coil takes half a million of them.
"""

from __future__ import annotations

import struct
from dataclasses import dataclass

from windctl.machine.plant.coil_growing import Coil, Spool, walked
from windctl.machine.plant.contact import BLOCK
from windctl.machine.plant.fate import Fate, draw_fate
from windctl.machine.plant.faults import Faults, gate_times
from windctl.machine.plant.guiding import Carriage, Hand
from windctl.machine.plant.sensing import Sensing
from windctl.machine.plant.spec import PlantSpec
from windctl.machine.plant.spindle import Spindle
from windctl.machine.twin.signals import GUARD_OK, PEDAL_DOWN, STOP_OK, Inputs, Outputs

_NEVER = 1 << 62


@dataclass(frozen=True, slots=True)
class PlantTruth:
    """What is really on the bobbin: turns, and ohm at 20 degrees C of their wire, stretch included."""

    true_turns: float
    true_dcr_20c_ohm: float


class Plant:
    """One machine, one spool, a bobbin. The same `spec`, `seed` and outputs give the same inputs."""

    __slots__ = (
        "_bobbins",
        "_counted",
        "_counts_per_turn",
        "_faults",
        "_gates",
        "_given",
        "_in_block",
        "_index_at",
        "_index_lost",
        "_next_gate",
        "_pins",
        "_seed",
        "_sensing",
        "_spool",
        "_spool_seed",
        "_steps_per_turn",
        "_stuck",
        "_turn_end",
        "_turn_start",
        "_turned",
        "_turning",
        "coil",
        "guide",
        "position",
        "spec",
        "spindle",
        "ticks",
        "wire_whole",
    )

    def __init__(
        self,
        spec: PlantSpec,
        seed: int,
        *,
        fate: Fate | None = None,
        faults: Faults | None = None,
        spool_seed: int | None = None,
        coil: int = 0,
        wound_m: float = 0.0,
    ) -> None:
        """`fate` instead of what `seed` would draw; `spool_seed` for a spool that several runs share, `coil`
        and `wound_m` for how many coils and metres they have wound from it."""
        self.spec = spec
        self._seed = seed
        self._spool_seed = seed if spool_seed is None else spool_seed
        self._given = fate
        self._faults = faults or Faults()
        self._gates = gate_times(self._faults)
        self._next_gate = self._gates[0][0] if self._gates else _NEVER
        world = self._fate(coil)
        self._bobbins = coil
        self.ticks = 0
        self.spindle = Spindle(spec.steps_per_turn)
        self._steps_per_turn = spec.steps_per_turn
        self._counts_per_turn = spec.counts_per_turn
        self.position = 0  # motor steps the spindle has really turned
        self._counted = 0
        self._stuck = False
        self._turned = 0
        self._turning = False
        self._index_lost = False
        self._index_at = int(world.index_place * spec.steps_per_turn) if spec.index else _NEVER
        self._spool = Spool(wound_m, walked(world, self._spool_seed, wound_m))
        self.guide: Carriage | Hand = Carriage(spec, world.guide_zero_mm) if spec.guide else Hand(spec, seed)
        self.wire_whole = True
        self._turn_start = 0
        self._turn_end = spec.steps_per_turn
        self.coil = Coil(spec, world, self._spool_seed, self._spool, self.guide.next_mm())
        self._sensing = Sensing(spec, world, seed)
        self._pins = STOP_OK | GUARD_OK
        self._in_block = BLOCK

    def step(self, outputs: Outputs, inputs: Inputs) -> None:
        """One tick: what the board asked for happens; `inputs` (all but `received`) is what it sees of it."""
        self.ticks = ticks = self.ticks + 1
        if self._in_block == BLOCK:
            self._new_block(outputs)
        self._in_block += 1
        if ticks >= self._next_gate:
            self._move_gates()
        spindle = self.spindle
        moved = spindle.advance(outputs.rate, outputs.drive_enable and self._pins & STOP_OK)
        inputs.steps_issued = spindle.issued
        if moved:
            self._turned += moved
            self.position = position = self.position + moved
            counted = position * self._counts_per_turn // self._steps_per_turn
            inputs.count_delta = 0 if self._stuck else counted - self._counted
            self._counted = counted
            if position >= self._index_at:
                self._index_at += self._steps_per_turn
                inputs.index = 0 if self._index_lost else 1
            else:
                inputs.index = 0
            if position >= self._turn_end:
                self._turn_over()
            elif moved < 0:
                self._unwind()
            elif not self._turning:
                self._look()
        else:
            inputs.count_delta = inputs.index = 0
            if self._turning and not spindle.speed:
                self._look()
        if outputs.guide_steps:
            self.guide.move(outputs.guide_steps)
        self._sensing.sample(self.position - self._turn_start, inputs)
        inputs.pins = self._pins | self.guide.switches

    def truth(self) -> PlantTruth:
        """For whoever judges a run from outside; nothing in a run may look."""
        coil = self.coil
        part = (self.position - self._turn_start) / self._steps_per_turn if self.wire_whole else 0.0
        return PlantTruth(coil.turns + part, coil.ohm + coil.next_ohm * part)

    # ------------------------------------------------------------ what people do at the machine

    def wound_already(self, turns: float, segments: bytes) -> None:
        """Puts a coil of `turns` on the empty spindle, laid as the program's segments (u16, i16 LE) have it.

        For going on with a simulated coil after the process that wound it has ended.
        """
        wanted = round(turns * self._counts_per_turn)
        count = 0
        for counts, steps in struct.iter_unpack("<Hh", segments):
            part = min(counts, wanted - count)
            self.guide.move(steps if part == counts else round(steps * part / counts))
            count += part
            while (self.coil.turns + 1) * self._counts_per_turn <= count:
                self.coil.end_turn(self.guide.next_mm())
            if count >= wanted:
                break
        whole = self.coil.turns * self._steps_per_turn
        self._turn_start, self._turn_end = self.position + whole, self.position + whole + self._steps_per_turn
        self.position += round(turns * self._steps_per_turn)
        self._counted = self.position * self._counts_per_turn // self._steps_per_turn
        while self._index_at <= self.position:
            self._index_at += self._steps_per_turn
        self._look()

    def turn_by_hand(self, turns: float) -> None:
        """Turns the spindle slowly, with drives off; negative unwinds."""
        self.spindle.turn_by_hand(round(turns * self._steps_per_turn))

    def connect(self, ohm: float | None) -> None:
        """Puts the contact's leads on a resistor (0: together, infinite: on nothing); None: on the wire."""
        self._sensing.connect(ohm)
        self._look()

    def own_motor(self, rpm: float) -> None:
        """Sets the motor of a machine whose spindle no board drives; 0 lets it coast."""
        self.spindle.own_motor(round(rpm * self._steps_per_turn / 60.0))

    def press_pedal(self, *, down: bool) -> None:
        """Presses the hold-to-run pedal, or lets it go."""
        self._set_pin(PEDAL_DOWN, down)

    def set_guard(self, *, closed: bool) -> None:
        """Closes or opens the guard."""
        self._set_pin(GUARD_OK, closed)

    def set_stop(self, *, closed: bool) -> None:
        """Closes (releases) or opens (presses) the hardware stop, which takes the drives' power."""
        self._set_pin(STOP_OK, closed)

    def new_bobbin(self, guide_motor: int = 0) -> None:
        """Takes the coil off, puts an empty bobbin on, ties on the wire, and sets the guide by hand.

        `guide_motor`: what the board calls that place of the guide, in motor steps.
        """
        self._bobbins += 1
        world = self._fate(self._bobbins)
        self.guide.set_to(guide_motor)
        self.wire_whole = True
        self._tie_on()
        self.coil = Coil(self.spec, world, self._spool_seed, self._spool, self.guide.next_mm())
        self._sensing.new_coil(world)
        self._look()

    def put_right(self) -> None:
        """Splices a broken wire, sets the belt back on its pulleys, frees a stuck encoder and index."""
        if not self.wire_whole:
            self.wire_whole = True
            self._tie_on()
        self._faults = Faults()
        self.spindle.slip(1.0)
        self._stuck = self._index_lost = False
        self._look()

    def break_wire(self) -> None:
        """The wire breaks now; the turn being laid is lost."""
        self.wire_whole = False
        self._look()

    def _set_pin(self, pin: int, on: bool) -> None:
        self._pins = self._pins | pin if on else self._pins & ~pin

    # ------------------------------------------------------------ now and then

    def _fate(self, bobbin: int) -> Fate:
        if self._given is not None:
            return self._given
        return draw_fate(self.spec, self._seed, coil=bobbin, spool_seed=self._spool_seed)

    def _turn_over(self) -> None:
        while self.position >= self._turn_end:
            self._turn_start = self._turn_end
            self._turn_end += self._steps_per_turn
            if self.wire_whole:
                self.coil.end_turn(self.guide.next_mm())
        self._fail_in_time()
        self._look()

    def _unwind(self) -> None:
        while self.position < self._turn_start:
            if self.wire_whole and self.coil.take_off():
                self._turn_end = self._turn_start
                self._turn_start -= self._steps_per_turn
            else:
                self._tie_on()
        if self._index_at - self._steps_per_turn > self.position and self._index_at < _NEVER:
            self._index_at -= self._steps_per_turn
        self._look()

    def _tie_on(self) -> None:
        """The turn being laid begins where the spindle now stands."""
        self._turn_start = self.position
        self._turn_end = self.position + self._steps_per_turn

    def _fail_in_time(self) -> None:
        faults, turns = self._faults, self.coil.turns
        if faults.wire_breaks_at_turn is not None and turns >= faults.wire_breaks_at_turn:
            self.wire_whole = False
        if faults.belt_slips_at_turn is not None and turns >= faults.belt_slips_at_turn:
            self.spindle.slip(faults.belt_grip)
        if faults.encoder_sticks_at_turn is not None and turns >= faults.encoder_sticks_at_turn:
            self._stuck = True
        if faults.index_lost_at_turn is not None and turns >= faults.index_lost_at_turn:
            self._index_lost = True

    def _move_gates(self) -> None:
        while self._gates and self._gates[0][0] <= self.ticks:
            _, pin, closed = self._gates.pop(0)
            self._set_pin(pin, closed)
        self._next_gate = self._gates[0][0] if self._gates else _NEVER

    def _new_block(self, outputs: Outputs) -> None:
        rpm = abs(self._turned) * 60_000.0 / (BLOCK * self._steps_per_turn)
        self._sensing.new_block(self.coil, rpm / self.spec.cruise_rpm, drives_off=not outputs.drive_enable)
        self._turned = 0
        self._in_block = 0
        self._look()

    def _look(self) -> None:
        speed = self.spindle.speed
        self._turning = speed > 0
        rpm = speed * 60.0 / self._steps_per_turn
        self._sensing.look(self.coil, rpm, wire_whole=self.wire_whole)
