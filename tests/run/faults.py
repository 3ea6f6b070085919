"""Every fault that a bench can have, on a served board: what is done, and what then must hold.

`python -m tests.run.faults` plays all of them out, or those named, and prints the table of what was seen;
with `expected`, of what must be seen.
"""

from __future__ import annotations

import re
import signal
import sys
import tempfile
from collections.abc import Callable, Iterable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path

from tests.run.causes import (
    WIRE_BREAKS_AT,
    already_whole,
    at_terminal,
    board_reset,
    book_locked,
    book_read_only,
    changes_wire,
    clears,
    clock_set_back,
    counts_anew,
    disk_full,
    disk_stalls,
    ends_it,
    journal_dies,
    killed,
    nobody_there,
    opens,
    plug_pulled,
    port_moved,
    resumed,
    resumed_at_turn,
    resumed_elsewhere,
    resumed_under_another_name,
    second_wind,
    signalled,
    splices,
    suspended,
    terminal_closed,
    unwinds,
    wound_anew,
)
from tests.run.stage import Ended, Stage
from windctl.machine.plant.faults import Faults

TOGETHER = 6  # played out at the same time: they mostly wait


@dataclass(frozen=True)
class Fault:
    """One row: `done` in words and as `cause`; the rest is what must be seen. `why` is a regular expression
    for the record's own reasons, `says` for standard error; `mend` makes the coil, or the next one, whole."""

    name: str
    done: str
    cause: Callable[[Stage], Ended]
    board: str
    outcome: str
    code: int
    why: str
    says: str
    mend: Callable[[Stage], None]
    door: str = "tcp"
    faults: Faults | None = None


@dataclass(frozen=True)
class Seen:
    """What came of one fault."""

    ended: Ended
    board: str
    outcome: str
    why: str


MENDED = {
    resumed: "`resume`",
    resumed_elsewhere: "`resume --port`",
    resumed_under_another_name: "`resume` finds it",
    resumed_at_turn: "`resume --at-turn`",
    wound_anew: "a new `wind`",
    already_whole: "nothing to do",
}

# ---------------------------------------------------------------- the table

NOBODY = "nobody to ask"
DONE = "the turns asked for are wound"

FAULTS = (
    Fault(
        "unplugged", "the plug is pulled in mid-coil", plug_pulled, "held (silence)", "open", 1,
        "the line on .* is lost", "THE STOP IS NOT CONFIRMED: use the hardware stop", resumed_elsewhere,
    ),
    Fault(
        "another name", "pulled, and put back under another name", port_moved, "held (silence)", "open", 1,
        "the line on .* is lost", "check plug and power", resumed_under_another_name, door="pty",
    ),
    Fault(
        "second wind", "a second `wind` on the port", second_wind, "held (stop point)", "finished", 4, DONE,
        "one port has one user: end that process first", already_whole,
    ),
    Fault(
        "disk full", "the disk takes no more bytes", disk_full, "held (hold)", "open", 1, "",
        "the disk that holds the coil book .* (is full|failed)", resumed,
    ),
    Fault(
        "book read-only", "the book may not be written", book_read_only, "drives off (boot)", "no coil", 1,
        "", "is read only here: allow writing", wound_anew,
    ),
    Fault(
        "book locked", "another program locks the book for 14 s", book_locked, "held (hold)", "open", 1,
        f"the record is 3 s behind; {NOBODY}", "waits for 'go' .*the record is 3 s behind", resumed,
    ),
    Fault(
        "journal dies", "its thread meets an exception that nobody foresaw", journal_dies, "held (hold)",
        "open", 1, "", "the journal failed: RuntimeError: torn to pieces", resumed,
    ),
    Fault(
        "disk stalls", "a commit takes 5 s", disk_stalls, "held (hold)", "open", 1,
        f"the record is 3 s behind; {NOBODY}", "waits for 'go' .*the record is 3 s behind", resumed,
    ),
    Fault(
        "suspended", "SIGSTOP, SIGCONT after 5 s", suspended, "held (silence)", "open", 1,
        rf"this computer stood still for \d+\.\d s; {NOBODY}", "waits for 'go' .*stood still", resumed,
    ),
    Fault(
        "Ctrl-C", "SIGINT", signalled(signal.SIGINT), "held (hold)", "open", 130, "interrupted by SIGINT",
        "The spindle stands, the coil stays open: windctl resume", resumed,
    ),
    Fault(
        "Ctrl-C twice", "SIGINT, and again while it brakes", signalled(signal.SIGINT, signal.SIGINT),
        "held (hold)", "open", 130, "interrupted by SIGINT", "The spindle stands, the coil stays open",
        resumed,
    ),
    Fault(
        "SIGTERM", "SIGTERM", signalled(signal.SIGTERM), "held (hold)", "open", 130, "interrupted by SIGTERM",
        "The spindle stands, the coil stays open", resumed,
    ),
    Fault(
        "SIGHUP", "SIGHUP", signalled(signal.SIGHUP), "held (hold)", "open", 130, "interrupted by SIGHUP",
        "The spindle stands, the coil stays open", resumed,
    ),
    Fault(
        "terminal closed", "the terminal's window is closed", terminal_closed, "held (hold)", "open", 130,
        "interrupted by SIGHUP", "", resumed,
    ),
    Fault(
        "killed", "SIGKILL", killed, "held (silence)", "open", -9, "", "", resumed,
    ),
    Fault(
        "clock set back", "the wall clock goes back an hour at each reading", clock_set_back,
        "held (stop point)", "finished", 0, DONE, "", already_whole,
    ),
    Fault(
        "board reset", "the board's power fails for a moment", board_reset, "drives off (boot)", "open", 2,
        "the board started anew", "the board was reset since; .*--at-turn", resumed_at_turn,
    ),
    Fault(
        "wire breaks, nobody there", "the wire breaks at turn 22", nobody_there, "tripped (trip)", "tripped",
        5, "trip tension low; the board tripped: tension low", "the wire broke, left its path or ran out",
        wound_anew, faults=Faults(wire_breaks_at_turn=WIRE_BREAKS_AT),
    ),
    Fault(
        "wire breaks", "the wire breaks; `splice`, `clear`, `go`", at_terminal(splices), "held (stop point)",
        "finished", 0, f"trip tension low; {DONE}", "", already_whole,
        faults=Faults(wire_breaks_at_turn=WIRE_BREAKS_AT),
    ),
    Fault(
        "new spool", "Enter, `new wire`, `go`", at_terminal(changes_wire), "held (stop point)", "finished", 0,
        f"held at the keyboard; {DONE}", "", already_whole,
    ),
    Fault(
        "count lost", "the index fails; `clear`, `turn N`, `go`", at_terminal(counts_anew),
        "held (stop point)", "finished", 0, f"trip index; {DONE}", "", already_whole,
        faults=Faults(index_lost_at_turn=20),
    ),
    Fault(
        "unwinding", "Enter, `unwind 5`, turned back by hand, `go`", at_terminal(unwinds),
        "held (stop point)", "finished", 0, f"held at the keyboard; {DONE}", "", already_whole,
    ),
    Fault(
        "guard", "the guard is opened; closed, `clear`, `go`", at_terminal(opens("guard")),
        "held (stop point)", "finished", 0, f"trip guard; {DONE}", "", already_whole,
    ),
    Fault(
        "hardware stop", "pressed; released, `clear`, `go`", at_terminal(opens("stop")), "held (stop point)",
        "finished", 0, f"trip stop input; {DONE}", "", already_whole,
    ),
    Fault(
        "belt slips", "the belt slips; put right, `clear`, `go`", at_terminal(clears), "held (stop point)",
        "finished", 0, f"trip slip; {DONE}", "", already_whole, faults=Faults(belt_slips_at_turn=20),
    ),
    Fault(
        "ended", "Enter, `end`", at_terminal(ends_it), "held (hold)", "stopped", 5,
        "held at the keyboard; ended by the operator", "", wound_anew,
    ),
)  # fmt: skip


def play_out(fault: Fault, folder: Path) -> Seen:
    """Do it, look at board and book, and make it whole. Raises AssertionError where that does not go."""
    stage = Stage(folder, fault.door, fault.faults)
    try:
        ended = fault.cause(stage)
        stage.until_standing()
        heads = stage.coils()
        seen = Seen(
            ended,
            stage.board,
            heads[0].outcome if heads else "no coil",
            stage.why() if heads else "",
        )
        fault.mend(stage)
        stage.coils()
    finally:
        stage.close()
    return seen


HEADER = """\
| fault | what is done | board | coil | the record's reasons | exit | afterwards |
|---|---|---|---|---|---|---|"""


def row(fault: Fault, board: str, outcome: str, why: str, code: int) -> str:
    """One line of the table, in Markdown."""
    cells = (fault.name, fault.done, board, outcome, why or "-", str(code), MENDED[fault.mend])
    return f"| {' | '.join(cells)} |"


def expected() -> str:
    """The table as it must come out."""
    plain = ((fault, re.sub(r" on \.\* ", " ", fault.why).replace(r"\d+\.\d s", "5 s")) for fault in FAULTS)
    rows = (row(fault, fault.board, fault.outcome, why, fault.code) for fault, why in plain)
    return "\n".join((HEADER, *rows))


def played(faults: Iterable[Fault]) -> str:
    """The table as it came out."""
    with tempfile.TemporaryDirectory() as name, ThreadPoolExecutor(TOGETHER) as pool:

        def one(numbered: tuple[int, Fault]) -> str:
            number, fault = numbered
            folder = Path(name) / str(number)
            folder.mkdir()
            seen = play_out(fault, folder)
            why = re.sub(r" on \S+ is lost: [^;]*(; check [^;]*)?", " is lost", seen.why)
            return row(fault, seen.board, seen.outcome, why, seen.ended.code)

        return "\n".join((HEADER, *pool.map(one, enumerate(faults))))


def main(names: list[str]) -> None:
    """Print the table: of all faults, of those named, or with `expected` what must come out."""
    if names == ["expected"]:
        print(expected())
    else:
        print(played(fault for fault in FAULTS if not names or fault.name in names))


if __name__ == "__main__":
    main(sys.argv[1:])
