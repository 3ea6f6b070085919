"""The served machine: its loop against a clock of our own, then a process on TCP and on a terminal."""

from __future__ import annotations

import io
import json
import os
import signal
import socket
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import pytest

from tests.machine.plant.worlds import BOBBIN
from tests.machine.virtual.bare_host import BareHost, bench_of
from windctl.errors import MachineError, UsageError
from windctl.machine.virtual.bench import Bench
from windctl.machine.virtual.endpoints import TcpEndpoint
from windctl.machine.virtual.serve import Server
from windctl.machine.virtual.trace import Trace
from windctl.protocol import messages as m

ROOT = Path(__file__).parents[3]
RECIPE = ROOT / "recipes" / "bridge-single-to-turns.toml"


class FakeDoor:
    """An endpoint whose waiting moves the clock; a script of what happens is run at its times (seconds)."""

    url = "door"

    def __init__(self) -> None:
        self.open = False
        self.seconds = 0.0
        self.incoming = b""
        self.outgoing = b""
        self.server: Server | None = None

    def clock(self) -> float:
        return self.seconds

    def wait(self, seconds: float) -> None:
        self.seconds += seconds

    def read(self) -> bytes:
        data, self.incoming = self.incoming, b""
        return data

    def write(self, data: bytes) -> None:
        if self.open:
            self.outgoing += data

    def close(self) -> None:
        """Nothing to shut."""


class Served:
    """A server run in slices, and a host at its door."""

    def __init__(self, bench: Bench, **options: Any) -> None:
        self.bench = bench
        self.door = FakeDoor()
        self.server = Server(bench, self.door, clock=self.door.clock, **options)
        self._loop = self.server.steps()
        self.host = BareHost(self._send, self._wait)

    def run(self, seconds: float) -> None:
        until = self.door.seconds + seconds
        while self.door.seconds < until:
            next(self._loop)

    def _send(self, data: bytes) -> None:
        self.door.incoming += data

    def _wait(self, ticks: int) -> bytes:
        self.run(ticks / 1000.0)
        data, self.door.outgoing = self.door.outgoing, b""
        return data


def lines_of(stream: io.StringIO) -> list[dict[str, Any]]:
    return [json.loads(line) for line in stream.getvalue().splitlines()]


def traced(bench: Bench) -> tuple[Trace, io.StringIO]:
    stream = io.StringIO()
    trace = Trace(bench, stream)
    bench.watch = trace.see
    return trace, stream


def test_the_machine_keeps_to_the_clock() -> None:
    served = Served(bench_of(BOBBIN))
    served.run(3.0)
    assert served.bench.ticks == pytest.approx(3000, abs=5)


def test_a_speed_makes_the_machines_time_go_faster() -> None:
    served = Served(bench_of(BOBBIN), speed=3.0)
    served.run(2.0)
    assert served.bench.ticks == pytest.approx(6000, abs=10)


def test_a_machine_without_a_pace_cannot_be_served() -> None:
    with pytest.raises(UsageError, match="0"):
        Served(bench_of(BOBBIN), speed=0.0)


def test_time_that_the_computer_lost_is_lost() -> None:
    served = Served(bench_of(BOBBIN))
    served.run(1.0)
    served.door.seconds += 60.0
    served.run(1.0)
    assert served.bench.ticks < 2500


def test_silence_is_measured_by_an_instrument_outside_the_host() -> None:
    """2 s after the last Beat the drive begins to slow down, and the spindle comes to rest as it must:
    from 2000 steps/s at 3333 steps/s2 that takes 0.6 s."""
    bench = bench_of(BOBBIN)
    trace, stream = traced(bench)
    served = Served(bench, trace=trace)
    served.door.open = True
    served.host.greet()
    served.host.make_ready()
    served.host.go(100 * 400, pace=2000)
    served.host.pass_time(3000)
    served.host.beating = False
    served.door.open = False  # the host crashed
    served.run(5.0)
    lines = lines_of(stream)
    braking = [line for line in lines if line["what"] == "braking"][-1]
    standing = [line for line in lines if line["what"] == "standing"][-1]
    assert braking["tick"] - braking["last_beat"] in (2000, 2001, 2002)
    assert 550 <= standing["tick"] - braking["tick"] <= 650
    assert standing["state"] == "held"
    assert standing["count"] == bench.board.count
    assert [line["what"] for line in lines if line["what"] in ("opened", "closed")] == ["opened", "closed"]


def test_the_trace_notes_every_change_of_state_and_counts_while_turning() -> None:
    bench = bench_of(BOBBIN)
    trace, stream = traced(bench)
    served = Served(bench, trace=trace)
    served.door.open = True
    served.host.greet()
    served.host.make_ready()
    served.host.go(30 * 400, pace=3000)
    served.host.wind_until_held()
    lines = lines_of(stream)
    assert [line["state"] for line in lines if line["what"] == "state"] == ["ready", "turning", "held"]
    counts = [line["count"] for line in lines if line["what"] == "count"]
    assert len(counts) > 3
    assert counts == sorted(counts)
    assert lines[0]["what"] == "switched_on"
    assert [line["tick"] for line in lines] == sorted(line["tick"] for line in lines)


def test_board_and_coil_outlive_a_client() -> None:
    served = Served(bench_of(BOBBIN))
    served.door.open = True
    served.host.greet()
    served.host.make_ready()
    served.host.go(10 * 400)
    served.host.wind_until_held()
    served.door.open = False
    served.run(5.0)
    served.door.open = True
    again = BareHost(served._send, served._wait).greet()
    assert (again.boot, again.count, again.trust) == (1, 10 * 400, 3)


def test_nothing_piles_up_for_a_client_that_is_not_there() -> None:
    served = Served(bench_of(BOBBIN))
    served.run(30.0)
    assert len(served.bench.take()) == 0
    assert served.door.outgoing == b""


@pytest.mark.parametrize(("resets", "boot"), [(False, 1), (True, 2)])
def test_a_board_that_resets_on_opening_does_so_at_every_opening(resets: bool, boot: int) -> None:
    served = Served(bench_of(BOBBIN), resets_on_open=resets)
    served.run(0.5)
    served.door.open = True
    served.run(0.1)  # what a host sends in the moment of the reset is lost
    assert served.host.greet().boot == boot
    served.door.open = False
    served.run(0.5)
    served.door.open = True
    served.run(0.1)
    assert BareHost(served._send, served._wait).greet().boot == 2 * boot - 1


def test_a_reset_asked_for_resets_the_board() -> None:
    served = Served(bench_of(BOBBIN))
    served.door.open = True
    served.host.greet()
    served.server.reboot()
    served.run(0.1)
    assert BareHost(served._send, served._wait).greet().boot == 2


def test_a_port_in_use_is_a_machine_error() -> None:
    first = TcpEndpoint("127.0.0.1", 0)
    try:
        with pytest.raises(MachineError, match="choose another port"):
            TcpEndpoint("127.0.0.1", int(first.url.rsplit(":", 1)[1]))
    finally:
        first.close()


# ---------------------------------------------------------------- as a process


@contextmanager
def process(tmp_path: Path, options: str = "") -> Iterator[tuple[subprocess.Popen[str], str, Path]]:
    """A served machine of its own: the process, its URL, its trace."""
    trace = tmp_path / "trace.jsonl"
    code = (
        "from pathlib import Path\n"
        "from windctl.machine.virtual.serve import serve\n"
        "from windctl.profile.builtin import VIRTUAL\n"
        "from windctl.recipe.load import load_recipe\n"
        f"serve(load_recipe(Path({str(RECIPE)!r})), VIRTUAL, trace=Path({str(trace)!r}), {options})\n"
    )
    server = subprocess.Popen([sys.executable, "-c", code], stdout=subprocess.PIPE, text=True, cwd=ROOT)
    assert server.stdout is not None
    try:
        yield server, server.stdout.readline().strip(), trace
    finally:
        if server.poll() is None:
            server.kill()
        server.wait(10)
        server.stdout.close()


def host_on(line: socket.socket) -> BareHost:
    """A host on a connected socket, in real time."""

    def wait(ticks: int) -> bytes:
        until, came = time.monotonic() + ticks / 1000.0, b""
        while (left := until - time.monotonic()) > 0:
            line.settimeout(max(left, 0.001))
            try:
                came += line.recv(4096)
            except TimeoutError:
                break
        return came

    return BareHost(line.sendall, wait)


def terminal_host(line: Any) -> BareHost:
    """A host on a `serial.Serial`, in real time."""

    def wait(ticks: int) -> bytes:
        until, came = time.monotonic() + ticks / 1000.0, b""
        while time.monotonic() < until:
            came += line.read(max(1, line.in_waiting))
        return came

    return BareHost(line.write, wait)


def connect(url: str) -> socket.socket:
    host, port = url.removeprefix("socket://").split(":")
    return socket.create_connection((host, int(port)), timeout=5)


def test_over_tcp_a_client_comes_goes_and_comes_back_and_a_signal_resets_or_ends(tmp_path: Path) -> None:
    with process(tmp_path) as (server, url, trace):
        with connect(url) as line:
            assert host_on(line).greet().boot == 1
            with connect(url) as second:  # one port has one user
                assert second.recv(10) == b""
        with connect(url) as line:
            assert host_on(line).greet().boot == 1
            if hasattr(signal, "SIGUSR1"):
                server.send_signal(signal.SIGUSR1)
                time.sleep(0.1)
                assert host_on(line).greet().boot == 2
        server.terminate()
        assert server.wait(10) == 0
        seen = [json.loads(text)["what"] for text in trace.read_text(encoding="utf-8").splitlines()]
    assert seen[0] == "switched_on"
    assert seen.count("opened") == 2


@pytest.mark.skipif(not hasattr(os, "openpty"), reason="platform: no pseudo-terminals here")
def test_over_a_terminal_the_serial_library_finds_the_board(tmp_path: Path) -> None:
    import serial

    with process(tmp_path, "pty=True, resets_on_open=True") as (server, url, _):
        assert url.startswith("/dev/")
        for boot in (2, 3):
            with serial.Serial(url, 115_200, timeout=0.01) as line:
                host = terminal_host(line)
                host.pass_time(50)
                assert host.greet().boot == boot
            time.sleep(0.1)
        server.terminate()
        assert server.wait(10) == 0


def test_the_greeting_of_a_served_machine_says_that_it_is_simulated(tmp_path: Path) -> None:
    with process(tmp_path, "speed=2.0") as (_, url, _trace), connect(url) as line:
        assert host_on(line).greet().capabilities & m.Capability.VIRTUAL
