"""How quickly the command answers: whole processes, best of several."""

from __future__ import annotations

import subprocess
import sys
import time


def best(arguments: list[str], times: int = 7) -> float:
    """Seconds of the quickest of several calls."""

    def once() -> float:
        begun = time.perf_counter()
        subprocess.run([sys.executable, *arguments], capture_output=True, check=True)
        return time.perf_counter() - begun

    return min(once() for _ in range(times))


def run() -> None:
    """Print the start-up times."""
    for words in (["-c", ""], ["-m", "windctl", "--version"], ["-m", "windctl", "--help"]):
        print(f"  python {' '.join(words) or '(nothing)'}: {best(words) * 1000:.0f} ms")
