"""How quickly the command answers: whole processes against a bare interpreter, so that the figures hold on
any computer. Processor time is the least of several; the clock's time is beside it."""

from __future__ import annotations

import fcntl
import os
import pty
import select
import struct
import subprocess
import sys
import tempfile
import termios
import time
from pathlib import Path

BARE_SCREEN = """
from textual.app import App
from textual.widgets import Static
class Bare(App):
    def compose(self):
        yield Static("its first screen")
Bare().run()
"""
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


def to_first_screen(arguments: list[str], words: str, folder: Path) -> float:
    """Seconds by the clock until `words` are sent to a terminal of 80x24."""
    master, slave = pty.openpty()
    fcntl.ioctl(slave, termios.TIOCSWINSZ, struct.pack("HHHH", 24, 80, 0, 0))
    environment = {**os.environ, "TERM": "xterm-256color", "PYTHONPATH": str(RECIPE.parents[1])}
    begun = time.perf_counter()
    process = subprocess.Popen(
        [sys.executable, *arguments], stdin=slave, stdout=slave, stderr=slave, cwd=folder, env=environment
    )
    try:
        os.close(slave)
        seen = ""
        while words not in seen:
            assert select.select([master], [], [], 30)[0], seen[-500:]
            seen += os.read(master, 65536).decode(errors="replace")
        return time.perf_counter() - begun
    finally:
        process.kill()
        process.wait()
        os.close(master)


def run() -> None:
    """Print the ratios, and how long the interface takes to its first screen."""
    with tempfile.TemporaryDirectory() as where:
        folder = Path(where)
        (folder / "coil.toml").write_text(RECIPE.read_text(encoding="utf-8"), encoding="utf-8")
        arguments = ["-m", "windctl", "--machine", "virtual", "--book", str(folder / "a.book")]
        library = min(to_first_screen(["-c", BARE_SCREEN], "first screen", folder) for _ in range(5))
        first = min(to_first_screen(arguments, "SIMULATED", folder) for _ in range(5))
        planned = min(to_first_screen(arguments, "program", folder) for _ in range(5))
    print(
        f"  the interface: first screen {first - library:.2f} s, first plan {planned - library:.2f} s beyond "
        f"the library's own {library:.2f} s (at most 0.8 wanted)"
    )
    bare, bare_took = best(["-c", ""])
    print(f"  bare python: {1000 * bare:.0f} ms of processor, {1000 * bare_took:.0f} ms by the clock")
    for words in (["--help"], ["--version"], ["plan", "--help"], ["plan", str(RECIPE)], ["coils", "list"]):
        cpu, took = best(["-m", "windctl", *words])
        asked = f" (at most {MOST_FOR_HELP:.0f} wanted)" if words == ["--help"] else ""
        name = " ".join(Path(word).name for word in words)
        print(f"  windctl {name}: {cpu / bare:.1f} times that, {took / bare_took:.1f} by the clock{asked}")
