"""From the hold key to the frame on the line: the whole way, with everything against it.

A terminal of its own at 80x24, a served machine over TCP that reports 500 times a second, the journal blocked
by somebody else's transaction up to 2 s ago, each screen and dialog in turn; then the same through a terminal
that takes only 11.5 kB a second.
"""

from __future__ import annotations

import random
import statistics
import tempfile
import time
from pathlib import Path

from tests.tui.terminal import Line, Terminal, journal_blocked, standing, turning, until, winding

PLACES: dict[str, tuple[str, ...]] = {  # every room and dialog that a turning coil can be left for
    "run screen": (),
    "note": ("n",),
    "tell": ("t",),
    "end?": ("e",),
    "help": ("f1",),
    "commands": ("f4",),
    "coils": ("f3",),
    "coils, finding": ("f3", "/"),
    "one coil": ("f3", "enter"),
    "spools": ("f7",),
    "a new spool": ("f7", "a"),
    "machine": ("f9",),
    "leave open?": ("l",),
    "leave?": ("f10",),
}
_WAY_BACK = 3  # presses of Escape from the deepest of them; one too many does nothing


def press_once(terminal: Terminal, line: Line, book: Path, keys: tuple[str, ...], wait_s: float) -> float:
    """Seconds from the key to the first Hold on the line; the coil turns again afterwards."""
    for key in keys:
        terminal.press(key)
        time.sleep(0.3 if len(keys) > 1 else 0.0)
    time.sleep(0.3)
    with journal_blocked(book):
        time.sleep(wait_s)
        before = len(line.holds)
        pressed = time.monotonic()
        terminal.press("f8")
        until(lambda: len(line.holds) > before, 10, "no hold came")
        late = line.holds[before] - pressed
    until(lambda: standing(line), 10, "it does not stand")
    terminal.press(*["escape"] * (_WAY_BACK if len(keys) > 1 else len(keys)))
    go_on(terminal, line)
    return late


def go_on(terminal: Terminal, line: Line) -> None:
    """Consent by the typed word; again where the run had not come to ask for it yet."""
    for _ in range(10):
        time.sleep(0.4)
        terminal.caught_up()
        terminal.press("g")
        time.sleep(0.4)
        terminal.press("g", "o", "enter")
        end = time.monotonic() + 2.0
        while time.monotonic() < end:
            if turning(line):
                return
            time.sleep(0.02)
        terminal.press("escape")
    raise AssertionError(f"it does not go on: {terminal.text[-2000:]!r}")


def delays(folder: Path, presses: int, bytes_per_s: float | None = None, seed: int = 1) -> list[float]:
    """The delay of each of `presses`, s, going round the places."""
    draws = random.Random(seed)
    places = list(PLACES.values())
    with winding(folder, bytes_per_s=bytes_per_s) as (terminal, line):
        return [
            press_once(terminal, line, folder / "a.book", places[turn % len(places)], draws.uniform(0.0, 1.7))
            for turn in range(presses)
        ]


def run(presses: int = 200) -> None:
    """Print worst and median of both."""
    for words, rate in (("a fast terminal", None), ("a terminal of 11.5 kB/s", 11_500.0)):
        with tempfile.TemporaryDirectory() as folder:
            found = delays(Path(folder), presses, rate)
        worst, median = max(found), statistics.median(found)
        where = list(PLACES)[found.index(worst) % len(PLACES)]
        print(
            f"  {words}: {len(found)} presses in {len(PLACES)} places, median {median * 1000:.1f} ms, "
            f"worst {worst * 1000:.1f} ms ({where})",
            flush=True,
        )
