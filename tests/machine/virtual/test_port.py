"""The virtual port: simulated time, and a pace that never changes a fact."""

from __future__ import annotations

import pytest

from tests.machine.plant.worlds import BOBBIN
from tests.machine.virtual.bare_host import BareHost, bench_of
from windctl.errors import LinkLost
from windctl.machine.ports import Port
from windctl.machine.virtual.port import VirtualPort
from windctl.protocol import messages as m


class Wall:
    """A wall clock that only sleeping moves, and a computer that now and then takes its time."""

    def __init__(self) -> None:
        self.seconds = 100.0
        self.slept = 0.0

    def clock(self) -> float:
        return self.seconds

    def sleep(self, seconds: float) -> None:
        self.seconds += seconds
        self.slept += seconds


def port_of(speed: float = 0.0, wall: Wall | None = None) -> VirtualPort:
    wall = wall or Wall()
    return VirtualPort(bench_of(BOBBIN), speed, clock=wall.clock, sleep=wall.sleep)


def talk(port: Port) -> list[m.Message]:
    """A short conversation over a port: half a second of a turning spindle."""

    def wait(ticks: int) -> bytes:
        until, came = port.now() + ticks / 1000.0, b""
        while (left := until - port.now()) > 1e-9:
            came += port.read(left)
        return came

    host = BareHost(port.write, wait)
    host.greet()
    host.make_ready()
    host.go(20 * 400)
    host.wind_until_held()
    return host.heard


def test_time_stands_still_while_nobody_reads() -> None:
    port = port_of()
    port.write(b"\0\0\0")
    assert port.now() == 0.0
    assert port.read(0.0) == b""
    assert port.now() == 0.0


def test_a_read_ends_with_the_first_bytes_and_not_before_its_wait_is_over() -> None:
    port = port_of()
    first = port.read(10.0)  # a board that was just switched on says so
    assert first
    assert 0.0 < port.now() < 0.1
    while port.read(0.002):
        pass
    before = port.now()
    assert port.read(0.002) == b""
    assert port.now() == pytest.approx(before + 0.002)


def test_it_is_a_port() -> None:
    port: Port = port_of()
    assert port.simulated


def test_the_pace_changes_no_fact() -> None:
    wall = Wall()
    assert talk(port_of()) == talk(port_of(speed=5.0, wall=wall))
    assert wall.slept > 0.5


def test_a_paced_machine_takes_its_time() -> None:
    wall = Wall()
    port = port_of(speed=4.0, wall=wall)
    begun = wall.seconds
    while port.now() < 8.0:
        port.read(0.05)
    assert wall.seconds - begun == pytest.approx(2.0, abs=0.05)


def test_a_paced_machine_that_fell_behind_does_not_rush() -> None:
    wall = Wall()
    port = port_of(speed=1.0, wall=wall)
    port.read(0.05)
    wall.seconds += 30.0  # the computer slept
    at = port.now()
    slept = wall.slept
    while port.now() < at + 1.0:
        port.read(0.05)
    assert wall.slept - slept == pytest.approx(1.0, abs=0.1)


def test_as_fast_as_possible_never_sleeps() -> None:
    wall = Wall()
    talk(port_of(wall=wall))
    assert wall.slept == 0.0


def test_a_speed_below_zero_is_refused() -> None:
    with pytest.raises(ValueError, match="-1"):
        port_of(speed=-1.0)


def test_a_closed_or_unplugged_port_is_a_lost_link() -> None:
    port = port_of()
    port.close()
    port.close()
    with pytest.raises(LinkLost, match="closed"):
        port.read(0.1)
    port = port_of()
    port.unplug()
    with pytest.raises(LinkLost, match="plug"):
        port.write(b"x")


def test_board_and_coil_outlive_the_port() -> None:
    bench = bench_of(BOBBIN)
    talk(VirtualPort(bench))
    again = VirtualPort(bench)
    assert again.truth().true_turns == pytest.approx(20.0, abs=1 / 400)
    assert again.now() > 1.0
