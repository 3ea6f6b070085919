"""What the run screen costs while a coil is wound in real time: processor, line, memory.

A terminal of its own, a served machine over TCP, so that the simulation is in another process.
"""

from __future__ import annotations

import tempfile
import time
from pathlib import Path

from tests.tui.terminal import Terminal, winding

SECONDS = 20.0
AS_IT_COMES = 0.001  # the board's own reports, twenty a second, and none repeated


def cost(terminal: Terminal, seconds: float) -> tuple[float, float]:
    """Per cent of a core, and kB a second to the terminal."""
    time.sleep(3.0)
    cpu, written, begun = terminal.cpu_s(), terminal.written, time.monotonic()
    time.sleep(seconds)
    took = time.monotonic() - begun
    return 100 * (terminal.cpu_s() - cpu) / took, (terminal.written - written) / took / 1000


def run() -> None:
    """Print the figures."""
    for size in ((80, 24), (120, 40)):
        with (
            tempfile.TemporaryDirectory() as folder,
            winding(Path(folder), size=size, status_per_s=AS_IT_COMES) as (terminal, _),
        ):
            cpu, rate = cost(terminal, SECONDS)
            memory = terminal.memory_mb()
        print(f"  {size[0]}x{size[1]}: {cpu:.1f} % of a core, {rate:.1f} kB/s, {memory:.0f} MB", flush=True)
    with (
        tempfile.TemporaryDirectory() as folder,
        winding(Path(folder), status_per_s=AS_IT_COMES, bytes_per_s=4_000.0) as (terminal, _),
    ):
        time.sleep(20.0)  # until it has found out
        cpu, rate = cost(terminal, SECONDS)
    print(f"  80x24 over a line of 4 kB/s: {cpu:.1f} % of a core, {rate:.1f} kB/s", flush=True)
