"""The C core in the place of the Python board: the same machine, the same coil, the same conversation."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest

from tests.firmware.host_board import HostBoard
from tests.machine.plant.worlds import BOBBIN, HAND_GUIDED
from tests.machine.virtual.bare_host import host_of, setup_for
from windctl.machine.plant.faults import Faults
from windctl.machine.plant.plant import Plant
from windctl.machine.plant.spec import PlantSpec
from windctl.machine.twin.board import Board
from windctl.machine.virtual.bench import Bench
from windctl.protocol import messages as m

COARSE = replace(BOBBIN, counts_per_turn=24, steps_per_turn=400, guide=False)


def bench_with(kind: Any, spec: PlantSpec, faults: Faults | None = None) -> Bench:
    """A bench around a board of this kind, fitted as the spec says."""
    fitted = (
        int(m.Capability.VIRTUAL | m.Capability.THERMOMETER | m.Capability.CONTACT) | setup_for(spec).fitted
    )
    board = kind(capabilities=fitted, contact_scale=spec.milliohm_per_unit, tension_scale=spec.tension_unit)
    return Bench(board, Plant(spec, 5, faults=faults))


def wind(bench: Bench, spec: PlantSpec) -> tuple[list[m.Message], object, int]:
    """Winds eighty turns with readings, a stop point that comes forward, and a look at the truth."""
    host = host_of(bench)
    host.greet()
    host.make_ready(setup_for(spec))
    host.ask(m.Measure(300, 400))
    host.go(100 * spec.counts_per_turn)
    host.pass_time(2000)
    host.ask(m.StopAt(*host.permission, 80 * spec.counts_per_turn))
    host.wind_until_held()
    host.pass_time(1000)
    return host.heard, bench.plant.truth(), bench.board.count


@pytest.mark.parametrize("spec", [BOBBIN, HAND_GUIDED, COARSE], ids=["guided", "hand-guided", "coarse"])
def test_a_coil_is_the_same_coil_on_either_board(cc: str, spec: PlantSpec) -> None:
    on_python = wind(bench_with(Board, spec), spec)
    on_core = wind(bench_with(HostBoard, spec), spec)
    assert on_core == on_python
    assert on_core[2] == 80 * spec.counts_per_turn
    assert sum(isinstance(message, m.Reading) for message in on_core[0]) > 5


def test_a_broken_wire_trips_the_core_where_it_trips_the_twin(cc: str) -> None:
    faults = Faults(wire_breaks_at_turn=60)
    on_python = wind(bench_with(Board, BOBBIN, faults), BOBBIN)
    bench = bench_with(HostBoard, BOBBIN, faults)
    on_core = wind(bench, BOBBIN)
    assert on_core == on_python
    assert bench.board.trip == m.Trip.TENSION_LOW


def test_its_figures_are_read_by_name_and_a_power_cycle_leaves_the_boot_number(cc: str) -> None:
    board = HostBoard(boot_number=0xFFFF)
    bench = Bench(board, Plant(BOBBIN, 1))  # type: ignore[arg-type]
    bench.advance(10)
    assert (board.ticks, board.state, board.boot, board.line.next) == (10, m.State.DRIVES_OFF, 0xFFFF, 0)
    with pytest.raises(AttributeError, match="no figure 'colour'"):
        _ = board.colour
    board.reboot()
    assert (board.ticks, board.boot) == (0, 0)
