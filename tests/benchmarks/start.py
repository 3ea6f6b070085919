"""How quickly the command answers: whole processes against a bare interpreter, so that the figures hold on
any computer. Processor time is the least of several; the clock's time is beside it."""

from __future__ import annotations

import os
import subprocess
import sys
import time
from pathlib import Path

RECIPE = Path(__file__).resolve().parents[2] / "recipes/bridge-single-to-resistance.toml"
MOST_FOR_HELP = 5.0


def best(arguments: list[str], times: int = 9) -> tuple[float, float]:
    """(processor seconds, seconds by the clock), the least of several calls."""

    def once() -> tuple[float, float]:
        begun = time.perf_counter()
        process = subprocess.Popen(
            [sys.executable, *arguments], stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL
        )
        _, status, used = os.wait4(process.pid, 0)
        took = time.perf_counter() - begun
        process.returncode = os.waitstatus_to_exitcode(status)
        assert process.returncode == 0, arguments
        return used.ru_utime + used.ru_stime, took

    runs = [once() for _ in range(times)]
    return min(cpu for cpu, _ in runs), min(took for _, took in runs)


def run() -> None:
    """Print the ratios."""
    bare, bare_took = best(["-c", ""])
    print(f"  bare python: {1000 * bare:.0f} ms of processor, {1000 * bare_took:.0f} ms by the clock")
    for words in (["--help"], ["--version"], ["plan", "--help"], ["plan", str(RECIPE)], ["coils", "list"]):
        cpu, took = best(["-m", "windctl", *words])
        asked = f" (at most {MOST_FOR_HELP:.0f} wanted)" if words == ["--help"] else ""
        name = " ".join(Path(word).name for word in words)
        print(f"  windctl {name}: {cpu / bare:.1f} times that, {took / bare_took:.1f} by the clock{asked}")
