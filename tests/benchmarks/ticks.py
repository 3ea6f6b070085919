"""What a millisecond of the virtual machine costs: board, plant, and both on a bench with its line."""

from __future__ import annotations

import copy
import time

from tests.machine.plant.worlds import BOBBIN
from tests.machine.virtual.bare_host import bench_of, host_of
from windctl.machine.twin.signals import Inputs, Outputs
from windctl.machine.virtual.bench import Bench
from windctl.protocol import messages as m

TICKS = 1500  # of cruising on what is in the queue, before the silence is noticed
TRIES = 7
MOST_US = 16.0  # 60 times real time, for board, plant, host and journal together


def cruising() -> Bench:
    """A bench that winds at 1000 rpm, readings on, its queue full. Two of them are alike to the last bit."""
    bench = bench_of(BOBBIN)
    host = host_of(bench)
    host.greet()
    host.make_ready()
    host.ask(m.Measure(200, 250))
    host.go(9000 * 400)
    host.pass_time(3500)
    host.lay(36)
    bench.send(b"")
    return bench


def recorded() -> tuple[list[Inputs], list[Outputs]]:
    """What board and plant saw of each other, tick by tick."""
    bench = cruising()
    heard: list[Inputs] = []
    asked: list[Outputs] = []
    for _ in range(TICKS):
        heard.append(copy.copy(bench.inputs))
        bench.advance(1)
        asked.append(copy.copy(bench.outputs))
    assert bench.board.state == m.State.TURNING
    return heard, asked


def board_us(heard: list[Inputs]) -> float:
    """Microseconds per tick of the board alone."""
    board, outputs = cruising().board, Outputs()
    begun = time.perf_counter()
    for inputs in heard:
        board.tick(inputs, outputs)
    return (time.perf_counter() - begun) / len(heard) * 1e6


def plant_us(asked: list[Outputs]) -> float:
    """Microseconds per tick of the plant alone."""
    plant, inputs = cruising().plant, Inputs()
    begun = time.perf_counter()
    for outputs in asked:
        plant.step(outputs, inputs)
    return (time.perf_counter() - begun) / len(asked) * 1e6


def bench_us() -> float:
    """Microseconds per tick of both, with the line and the machine's Status and Reading frames on it."""
    bench = cruising()
    begun = time.perf_counter()
    bench.advance(TICKS)
    return (time.perf_counter() - begun) / TICKS * 1e6


def measure() -> dict[str, float]:
    """Least microseconds per tick of several tries, by name."""
    heard, asked = recorded()
    return {
        "board": min(board_us(heard) for _ in range(TRIES)),
        "plant": min(plant_us(asked) for _ in range(TRIES)),
        "both, with the line": min(bench_us() for _ in range(TRIES)),
    }


def run() -> None:
    """Print microseconds per tick, and how many times faster than real time that is."""
    for name, us in measure().items():
        print(f"  {name}: {us:.2f} us a tick, {1000.0 / us:.0f} times real time")
    print(f"  (a run at 60 times real time may take {MOST_US:.0f} us a tick in all)")
