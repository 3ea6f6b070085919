"""Simulated machines to run the kit against: one plant, with whichever board in front of it."""

from __future__ import annotations

from typing import Any, cast

from tests.firmware.conformance.bench_hands import PlantHands
from tests.firmware.conformance.machine import Machine
from tests.firmware.conformance.rig import Rig
from windctl.desk.ordinary import ORDINARY
from windctl.machine.plant.made_for import plant_for
from windctl.machine.plant.plant import Plant
from windctl.machine.plant.spec import PlantSpec
from windctl.machine.twin.board import EVERYTHING, Board
from windctl.machine.virtual.bench import Bench
from windctl.machine.virtual.port import VirtualPort
from windctl.profile.builtin import VIRTUAL
from windctl.recipe.load import parse_recipe


class _NobodyAttends:
    """The kit asks for what it wants done; nobody presses a pedal by himself."""

    def see(self, state: int) -> None:
        """Nothing is done."""

    def look(self) -> None:
        """Nothing is done."""


def spec() -> PlantSpec:
    """An ordinary single coil on a machine that has everything."""
    return plant_for(parse_recipe(ORDINARY, "ordinary coil"), VIRTUAL)


def rig_on(bench: Any, machine: Machine | None = None) -> Rig:
    """The kit at a bench that has `Bench`'s face: its port, its plant, its restart."""
    return Rig(VirtualPort(bench), machine or Machine(), PlantHands(bench.plant, bench.reboot))


def rig_of(board: Any, machine: Machine | None = None) -> Rig:
    """The kit at a board with the twin's face, in front of the plant."""
    bench = Bench(cast("Board", board), Plant(spec(), 1))
    bench._attendant = cast("Any", _NobodyAttends())
    return rig_on(bench, machine)


def twin(capabilities: int = EVERYTHING) -> Rig:
    """The kit at the Python twin."""
    own = spec()
    return rig_of(
        Board(capabilities=capabilities, contact_scale=own.milliohm_per_unit, tension_scale=own.tension_unit)
    )
