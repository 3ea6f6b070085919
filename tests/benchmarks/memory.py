"""What a coil of 10 000 turns needs in memory, against a short one: whole processes, at their largest."""

from __future__ import annotations

import subprocess
import sys
import tempfile
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
TURNS = (500, 10_000)
_SMALL = """
import resource, subprocess, sys
subprocess.run(sys.argv[1:], stdout=subprocess.DEVNULL, check=True)
print(resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss)
"""


def resident_mb(turns: int, folder: Path) -> float:
    """MB at the most, of a whole simulated coil through the real command."""
    ready = (ROOT / "recipes/bridge-single-to-turns.toml").read_text(encoding="utf-8")
    lines = [f"turns = {turns}" if line.startswith("turns = ") else line for line in ready.splitlines()]
    recipe = folder / f"{turns}.toml"
    recipe.write_text("\n".join(lines), encoding="utf-8")
    options = ["--machine", "virtual", "--speed", "0", "-q", "--json", "--book", str(folder / "coils.book")]
    words = [sys.executable, "-m", "windctl", "wind", str(recipe), *options]
    # A process counts as at least as large as the one it was forked from, so a small one starts it.
    done = subprocess.run(
        [sys.executable, "-c", _SMALL, *words], cwd=ROOT, capture_output=True, text=True, check=True
    )
    return int(done.stdout) / (1024.0 if sys.platform == "linux" else 1024.0**2)


def run() -> None:
    """Print both, and what a turn adds."""
    with tempfile.TemporaryDirectory() as folder:
        short, long = (resident_mb(turns, Path(folder)) for turns in TURNS)
    added = (long - short) * 1024 / (TURNS[1] - TURNS[0])
    print(
        f"  {TURNS[0]} turns: {short:.0f} MB; {TURNS[1]} turns: {long:.0f} MB, "
        f"{long / short:.2f} times that, {added:.2f} kB a turn"
    )
