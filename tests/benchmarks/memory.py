"""What a coil of 10 000 turns needs in memory, against a short one: whole processes, at their largest.

And a sitting at the terminal interface: a coil of 10 000 turns simulated in the same process, and ten short
ones, one after the other by the key for the next one.
"""

from __future__ import annotations

import subprocess
import sys
import tempfile
import time
from pathlib import Path

from tests.cli.recipes import to_turns
from tests.tui.terminal import Terminal, until
from windctl.book.open import open_book

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


def finished(book: Path) -> int:
    """Coils in a book that are finished; asked rarely, since the book is being written."""
    time.sleep(0.5)
    if not book.exists():
        return 0
    with open_book(book, create=False, readonly=True) as opened:
        return sum(head.outcome == "finished" for head in opened.list())


def sitting(turns: int, coils: int, folder: Path) -> list[float]:
    """Resident MB of the interface after each of `coils` coils of `turns` turns."""
    recipe = to_turns(folder, turns)
    deep = recipe.read_text(encoding="utf-8").replace("flange_depth_mm = 8.5", "flange_depth_mm = 40")
    recipe.write_text(deep, encoding="utf-8")
    arguments = ["--machine", "virtual", "--speed", "0", "--book", str(folder / "a.book")]
    terminal = Terminal(arguments, folder, (120, 40))
    found = []
    try:
        until(lambda: "program" in terminal.text, 60, "no plan was shown")
        terminal.press("enter")
        for wound in range(1, coils + 1):
            until(lambda: "confirm each line" in terminal.text, 60, "no check list was shown")
            time.sleep(0.5)
            for _ in range(14):
                terminal.press("enter")
                time.sleep(0.05)
            terminal.text = ""
            terminal.press("s")
            until(lambda wound=wound: finished(folder / "a.book") == wound, 600, "no end")  # type: ignore[misc]  # bound here
            time.sleep(2.0)
            found.append(terminal.memory_mb())
            terminal.text = ""
            terminal.press("n")
    finally:
        terminal.close()
    return found


def run() -> None:
    """Print both, and what a turn adds; and what sittings need."""
    with tempfile.TemporaryDirectory() as folder:
        short, long = (resident_mb(turns, Path(folder)) for turns in TURNS)
    added = (long - short) * 1024 / (TURNS[1] - TURNS[0])
    print(
        f"  {TURNS[0]} turns: {short:.0f} MB; {TURNS[1]} turns: {long:.0f} MB, "
        f"{long / short:.2f} times that, {added:.2f} kB a turn"
    )
    with tempfile.TemporaryDirectory() as folder:
        (long_coil,) = sitting(TURNS[1], 1, Path(folder))
    with tempfile.TemporaryDirectory() as folder:
        after = sitting(300, 10, Path(folder))
    print(
        f"  the interface after {TURNS[1]} turns: {long_coil:.0f} MB; after the third and the tenth of ten "
        f"coils: {after[2]:.1f} and {after[9]:.1f} MB"
    )
