"""A whole coil of 8 000 turns on the virtual machine as fast as possible, through the real command."""

from __future__ import annotations

import json
import subprocess
import sys
import tempfile
import time
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
TURNS = 8000
LEAST = 60.0  # times faster than simulated time


def wound(folder: Path) -> tuple[float, float]:
    """Seconds of this computer, the process's start included, and of the simulated machine."""
    ready = (ROOT / "recipes/bridge-single-to-turns.toml").read_text(encoding="utf-8")
    recipe = folder / "coil.toml"
    lines = [f"turns = {TURNS}" if line.startswith("turns = ") else line for line in ready.splitlines()]
    recipe.write_text("\n".join(lines), encoding="utf-8")
    book = folder / "coils.book"
    common = ["--book", str(book), "--json"]
    windctl = [sys.executable, "-m", "windctl"]
    begun = time.perf_counter()
    done = subprocess.run(
        [*windctl, "wind", str(recipe), "--machine", "virtual", "--speed", "0", "-q", *common],
        capture_output=True, text=True, check=True, cwd=ROOT,
    )  # fmt: skip
    took = time.perf_counter() - begun
    coil = json.loads(done.stdout)
    assert coil["outcome"] == "finished", coil
    assert coil["turns"] == TURNS, coil
    shown = subprocess.run(
        [*windctl, "coils", "show", coil["coil"], *common],
        capture_output=True,
        text=True,
        check=True,
        cwd=ROOT,
    )
    simulated = json.loads(shown.stdout)["events"][-1]["at_ms"] / 1000.0
    return took, simulated


def run() -> None:
    """Print how long it took, and how much faster than simulated time that is."""
    with tempfile.TemporaryDirectory() as folder:
        took, simulated = wound(Path(folder))
    print(
        f"  {TURNS} turns, {simulated:.0f} s of simulated time, in {took:.1f} s: "
        f"{simulated / took:.0f} times faster (at least {LEAST:.0f} wanted)"
    )
