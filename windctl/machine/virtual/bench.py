"""Board, plant and line put together, tick by tick."""

from __future__ import annotations

from collections.abc import Callable

from windctl.machine.plant.faults import Faults
from windctl.machine.plant.made_for import plant_for
from windctl.machine.plant.plant import Plant
from windctl.machine.plant.spec import PlantSpec
from windctl.machine.twin.board import Board
from windctl.machine.twin.signals import Inputs, Outputs
from windctl.machine.virtual.attendant import LOOKS_EVERY, Attendant
from windctl.machine.virtual.line import SerialLine
from windctl.profile.model import MachineProfile
from windctl.protocol.messages import Capability
from windctl.recipe.model import Recipe

_QUEUE = 128


class Bench:
    """One machine, switched on. Time passes only in `advance`, a millisecond a tick.

    `watch`, where set, is called after every tick with the bytes the board received in it.
    """

    def __init__(self, board: Board, plant: Plant, line: SerialLine | None = None) -> None:
        self.board = board
        self.plant = plant
        self.line = line or SerialLine()
        self.outputs = Outputs()
        self.ticks = 0
        self.watch: Callable[[bytes], None] | None = None
        self.inputs = Inputs()
        self._attendant = Attendant(board, plant)
        self._arrived = bytearray()

    def advance(self, ticks: int, *, until_byte: bool = False) -> int:
        """Lets `ticks` pass; `until_byte` ends with the first byte for the host. Returns those passed."""
        inputs, outputs = self.inputs, self.outputs
        board, tick_board, step_plant = self.board, self.board.tick, self.plant.step
        to_board, to_host = self.line.to_board, self.line.to_host
        watch, attendant = self.watch, self._attendant
        attended = not self.plant.spec.drive or board.capabilities & Capability.PEDAL
        state = board.state
        passed = 0
        while passed < ticks:
            passed += 1
            self.ticks += 1
            inputs.received = to_board.pull(self.ticks) if to_board.busy else b""
            tick_board(inputs, outputs)
            if outputs.sent:
                to_host.put(outputs.sent)
            step_plant(outputs, inputs)
            if board.state != state:
                state = board.state
                attendant.see(state)
            if attended and self.ticks % LOOKS_EVERY == 0:
                attendant.look()
            if watch is not None:
                watch(inputs.received)
            if to_host.busy:
                arrived = to_host.pull(self.ticks)
                if arrived:
                    self._arrived += arrived
                    if until_byte:
                        break
        return passed

    def send(self, data: bytes) -> None:
        """Bytes from the host, onto the line."""
        if data:
            self.line.to_board.put(data)

    def take(self) -> bytes:
        """Bytes that have arrived at the host since the last call."""
        if not self._arrived:
            return b""
        arrived = bytes(self._arrived)
        self._arrived.clear()
        return arrived

    def reboot(self) -> None:
        """The board's power goes and comes back; the plant lives on, and a turning spindle coasts."""
        self.board.reboot()
        self.outputs.rate = self.outputs.guide_steps = 0
        self.outputs.drive_enable = self.outputs.guide_enable = 0
        self.outputs.sent = b""
        self.line.clear()
        self._attendant.see(self.board.state)


def fittings(spec: PlantSpec, profile: MachineProfile) -> int:
    """What the virtual board of this machine says it has, as bits of `Capability`."""
    return int(
        Capability.VIRTUAL
        | Capability.THERMOMETER
        | (Capability.DRIVE_STEP if spec.drive else 0)
        | (Capability.GUIDE_STEP if spec.guide else 0)
        | (Capability.INDEX if spec.index else 0)
        | (Capability.CONTACT if spec.readings != "none" else 0)
        | (Capability.TENSION if spec.tension_sensor else 0)
        | (Capability.PEDAL if profile.pedal else 0)
    )


def virtual_bench(
    recipe: Recipe,
    profile: MachineProfile,
    seed: int,
    *,
    spool_seed: int | None = None,
    coil: int = 0,
    wound_m: float = 0.0,
    faults: Faults | None = None,
    latency_ticks: int = 0,
) -> Bench:
    """The machine of `profile`, with the bobbin and the wire of `recipe`, as `seed` draws them.

    `spool_seed`: of a spool from which `coil` coils and `wound_m` metres were wound before.
    """
    spec = plant_for(recipe, profile)
    board = Board(
        capabilities=fittings(spec, profile),
        queue=profile.board.queue_segments or _QUEUE,
        contact_scale=spec.milliohm_per_unit,
        tension_scale=spec.tension_unit,
    )
    plant = Plant(spec, seed, faults=faults, spool_seed=spool_seed, coil=coil, wound_m=wound_m)
    return Bench(board, plant, SerialLine(profile.port.baud, latency_ticks))
