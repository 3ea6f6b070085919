"""The share of a core that a run spends on its line in real time: 20 Status and 10 Readings a second heard,
decoded, folded, forecast with, and made durable, the program fed and the beat sent.

The board is a process of its own behind TCP; this process is the whole host, its processor time is counted.
A real board averages over whole revolutions and 100 ms besides, and so reads four or five times a second:
this one is made to be quicker.
"""

from __future__ import annotations

import re
import subprocess
import sys
import tempfile
import time
from pathlib import Path
from unittest.mock import patch

from tests.run.winding import here, order
from windctl.book.open import open_book
from windctl.machine.serial_port import SerialPort
from windctl.record import wanting
from windctl.record.events import ReadingTaken, StatusHeard
from windctl.run.requests import Hold
from windctl.run.wind import begin

ROOT = Path(__file__).resolve().parents[2]
EVERY_TICKS = 100
QUICK_BOARD = """
from windctl.machine.twin import contact_mean
contact_mean.BOX = 30
start = contact_mean.ContactMean.start
contact_mean.ContactMean.start = lambda mean, window, *more: start(mean, min(window, 1), *more)
from windctl.cli.main import main
main()
"""
SECONDS = 10.0
BY_THEN_TURNS = 60.0


def measured(folder: Path) -> tuple[float, float, float]:
    """(share of a core, Status a second, Readings a second) while a coil is wound at cruise."""
    text = (ROOT / "recipes/bridge-single-to-resistance.toml").read_text(encoding="utf-8")
    for key, value in (("ramp_rpm_per_s", 300), ("start_turns", 1)):
        text = re.sub(rf"^{key} = \d+", f"{key} = {value}", text, flags=re.MULTILINE)
    file = folder / "coil.toml"
    file.write_text(text, encoding="utf-8")
    serve = [
        sys.executable,
        "-c",
        QUICK_BOARD,
        "machine",
        "serve",
        "--machine",
        "virtual",
        "--recipe",
        str(file),
    ]
    with (
        subprocess.Popen([*serve, "--speed", "1"], stdout=subprocess.PIPE, text=True, cwd=ROOT) as served,
        patch.object(wanting, "EVERY_TICKS", EVERY_TICKS),
        patch.object(wanting, "WINDOW_TICKS", EVERY_TICKS),
        open_book(folder / "coils.book") as book,
    ):
        try:
            assert served.stdout is not None
            port = SerialPort(served.stdout.readline().strip())
            _, wanted = order(text)
            winding = begin(wanted, book, port, here())
            winding.start()
            while winding.look().turns < BY_THEN_TURNS:
                time.sleep(0.1)
            begun, used = time.perf_counter(), time.process_time()
            time.sleep(SECONDS)
            took, cost = time.perf_counter() - begun, time.process_time() - used
            winding.request(Hold("the benchmark", "it has seen enough", leave=True))
            winding.wait(30.0)
            outcome = winding.close()
            port.close()
            heard = [event for event in book.events(outcome.number) if isinstance(event, StatusHeard)]
            read = [event for event in book.events(outcome.number) if isinstance(event, ReadingTaken)]
        finally:
            served.terminate()
    return cost / took, a_second(heard), a_second(read)


def a_second(events: list[StatusHeard] | list[ReadingTaken]) -> float:
    """How many of them came in a second of the last few, by the port's clock."""
    late = [event.at_ms for event in events if event.at_ms > events[-1].at_ms - 1000 * SECONDS]
    return (len(late) - 1) / ((late[-1] - late[0]) / 1000)


def run() -> None:
    """Print the share."""
    with tempfile.TemporaryDirectory() as folder:
        share, statuses, readings = measured(Path(folder))
    print(f"  {100 * share:.1f} % of a core at {statuses:.1f} Status and {readings:.1f} Readings a second")
