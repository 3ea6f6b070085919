"""Every fault that a bench can have, on a served board: what is done, and what then must hold.

`python -m tests.run.faults` plays all of them out, or those named, and prints the table of what was seen;
with `expected`, of what must be seen.
"""

from __future__ import annotations

import json
import os
import re
import signal
import sqlite3
import sys
import tempfile
import time
from collections.abc import Callable, Iterable
from concurrent.futures import ThreadPoolExecutor
from contextlib import closing
from dataclasses import dataclass
from pathlib import Path

from tests.cli.processes import Session, until
from tests.run.stage import TURNS, Ended, Stage
from windctl.book.open import open_book
from windctl.machine.virtual.faults import Faults
from windctl.record.events import WentOn

AT_TURN = 12.0
WIRE_BREAKS_AT = 22

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


# ---------------------------------------------------------------- what is done


def plug_pulled(stage: Stage) -> Ended:
    with stage.begun(stage.wind()) as host:
        stage.until_turn(AT_TURN)
        stage.served.plug.pull()
        return stage.done(host)


def port_moved(stage: Stage) -> Ended:
    list_port(stage)
    with stage.begun(stage.wind(), afflicted=f"ports={stage.folder / 'ports.json'}") as host:
        stage.until_turn(AT_TURN)
        stage.served.plug.pull()
        return stage.done(host)


def list_port(stage: Stage) -> None:
    """This computer's ports: the board, and something else."""
    board = {
        "device": stage.served.url,
        "description": "a board",
        "vid": 0x1209,
        "pid": 1,
        "serial_number": "77",
    }
    other = {"device": "/dev/ttyS77", "description": "n/a", "vid": None, "pid": None, "serial_number": None}
    (stage.folder / "ports.json").write_text(json.dumps([other, board]), encoding="utf-8")


def second_wind(stage: Stage) -> Ended:
    with stage.begun(stage.wind()) as host:
        stage.until_turn(0.1)
        second = stage.call(stage.wind())
        assert f"process {host.pid} for coil v1-" in second.err, second.err
        first = stage.done(host)
        assert first.code == 0 and first.answer["turns"] == TURNS, first
        assert len(stage.facts(WentOn)) == 1  # nothing stopped it on the way
    return second


def disk_full(stage: Stage) -> Ended:
    with stage.begun(stage.wind(), afflicted=f"disk_full={stage.book}") as host:
        stage.until_turn(AT_TURN)
        host.send_signal(signal.SIGUSR1)
        return stage.done(host)


def book_read_only(stage: Stage) -> Ended:
    open_book(stage.book).close()
    stage.book.chmod(0o444)
    return stage.call(stage.wind(), afflicted="as_anybody")


def book_locked(stage: Stage) -> Ended:
    with stage.begun(stage.wind()) as host:
        stage.until_turn(AT_TURN)
        with closing(sqlite3.connect(stage.book)) as other:
            other.execute("BEGIN EXCLUSIVE")
            stage.until_standing()
            time.sleep(11.0)  # the book's own patience is 10 s
            other.rollback()
        return stage.done(host)


def journal_dies(stage: Stage) -> Ended:
    with stage.begun(stage.wind(), afflicted="journal_dies") as host:
        stage.until_turn(AT_TURN)
        host.send_signal(signal.SIGUSR1)
        return stage.done(host)


def disk_stalls(stage: Stage) -> Ended:
    with stage.begun(stage.wind(), afflicted="disk_stalls") as host:
        stage.until_turn(AT_TURN)
        host.send_signal(signal.SIGUSR1)
        return stage.done(host)


def suspended(stage: Stage) -> Ended:
    with stage.begun(stage.wind()) as host:
        stage.until_turn(AT_TURN)
        host.send_signal(signal.SIGSTOP)
        time.sleep(5.0)
        assert stage.served.standing
        host.send_signal(signal.SIGCONT)
        return stage.done(host)


def signalled(*numbers: int) -> Callable[[Stage], Ended]:
    def cause(stage: Stage) -> Ended:
        with stage.begun(stage.wind()) as host:
            stage.until_turn(AT_TURN)
            for number in numbers:
                host.send_signal(number)
                time.sleep(0.3)  # the first hold is on its way, the spindle still turns
            ended = stage.done(host)
        assert len(re.findall("already stopping", ended.err)) == len(numbers) - 1, ended.err
        return ended

    return cause


def killed(stage: Stage) -> Ended:
    with stage.begun(stage.wind()) as host:
        stage.until_turn(AT_TURN)
        host.kill()
        return stage.done(host)


def terminal_closed(stage: Stage) -> Ended:
    with stage.at_terminal(stage.wind(), felt=True) as session:
        stage.until_turn(AT_TURN)
        os.close(session.terminal)
        session.terminal = -1
        session.process.wait(30)
        assert session.process.stdout is not None
        return Ended(session.process.returncode, session.process.stdout.read(), session.seen)


def clock_set_back(stage: Stage) -> Ended:
    return stage.call(stage.wind(), afflicted="clock_back")


def board_reset(stage: Stage) -> Ended:
    with stage.begun(stage.wind()) as host:
        stage.until_turn(AT_TURN)
        stage.served.reboot()
        return stage.done(host)


def nobody_there(stage: Stage) -> Ended:
    return stage.call(stage.wind())


# ---------------------------------------------------------------- with somebody at the terminal


def told(session: Session, text: str) -> None:
    """Wait until this was shown since the last time."""
    session.shows(text, 30.0)
    session.seen = session.seen.partition(text)[2]


def at_terminal(play: Callable[[Stage, Session], None]) -> Callable[[Stage], Ended]:
    """Somebody answers; `play` is what they do."""

    def cause(stage: Stage) -> Ended:
        with stage.at_terminal(stage.wind()) as session:
            play(stage, session)
            end = time.monotonic() + 60.0
            while session.process.poll() is None:
                assert time.monotonic() < end, session.seen
                session.look()
            assert session.process.stdout is not None
            return Ended(session.process.returncode, session.process.stdout.read(), session.seen)

    return cause


def held(stage: Stage, session: Session) -> None:
    """Held by Enter, the drives off."""
    stage.until_turn(AT_TURN)
    session.types("\n")
    told(session, "Type go and Enter to go on")


def splices(stage: Stage, session: Session) -> None:
    told(session, "Once that is put right, type clear")
    session.types("splice\n")
    told(session, "noted: spliced at turn")
    session.types("clear\n")
    told(session, "Type go and Enter to go on")
    session.types("go\n")


def changes_wire(stage: Stage, session: Session) -> None:
    held(stage, session)
    session.types("new wire spool 8\n")
    told(session, "drives off, hands may go in")
    session.types("new wire spool 8\n")
    told(session, "noted: another spool from turn")
    session.types("go\n")


def counts_anew(stage: Stage, session: Session) -> None:
    told(session, "Once that is put right, type clear")
    session.types("clear\n")
    told(session, "Count the turns")
    session.types(f"turn {stage.served.true_turns:.4f}\n")
    told(session, "turns lie on the bobbin")
    session.types("go\n")


def unwinds(stage: Stage, session: Session) -> None:
    held(stage, session)
    session.types("unwind 5\n")
    told(session, "drives off, hands may go in")
    back = stage.served.bench.board.count - 5 * 400
    stage.served.bench.plant.turn_by_hand(-5.0)
    until(lambda: stage.served.bench.board.count <= back + 2 and stage.served.standing, 20)
    time.sleep(0.2)
    session.types("go\n")


def opens(what: str) -> Callable[[Stage, Session], None]:
    """Guard or hardware stop opens in mid-coil, and is closed again."""

    def play(stage: Stage, session: Session) -> None:
        stage.until_turn(AT_TURN)
        plant = stage.served.bench.plant
        move = plant.set_guard if what == "guard" else plant.set_stop
        move(closed=False)
        told(session, "Once that is put right, type clear")
        session.types("clear\n")
        told(session, "the board refused: input open")
        move(closed=True)
        time.sleep(0.1)
        session.types("clear\n")
        told(session, "Type go and Enter to go on")
        session.types("go\n")

    return play


def clears(stage: Stage, session: Session) -> None:
    told(session, "Once that is put right, type clear")
    session.types("clear\n")
    told(session, "Type go and Enter to go on")
    session.types("go\n")


def ends_it(stage: Stage, session: Session) -> None:
    held(stage, session)
    session.types("end\n")


# ---------------------------------------------------------------- what makes it whole


def resumed(stage: Stage, *more: str, afflicted: str = "", off_by: float = 0.01) -> None:
    """`resume` winds the rest: as many turns as were asked for, by the count and in truth."""
    port = () if afflicted else ("--port", stage.served.url)
    done = stage.call(stage.resume(*port, *more), afflicted=afflicted)
    assert done.code == 0, done
    assert done.answer["outcome"] == "finished" and done.answer["turns"] == TURNS, done
    assert abs(stage.served.true_turns - TURNS) <= off_by, stage.served.true_turns
    assert len(stage.coils()) == 1


def resumed_under_another_name(stage: Stage) -> None:
    before = stage.served.url
    assert stage.served.plug.put_back() != before
    list_port(stage)
    resumed(stage, afflicted=f"ports={stage.folder / 'ports.json'}")


def resumed_elsewhere(stage: Stage) -> None:
    stage.served.plug.put_back()
    resumed(stage)


def resumed_at_turn(stage: Stage) -> None:
    refused = stage.call(stage.resume("--port", stage.served.url))
    assert refused.code == 2 and "--at-turn" in refused.err, refused
    resumed(stage, "--at-turn", f"{stage.served.true_turns:.4f}")


def wound_anew(stage: Stage) -> None:
    """The next coil is wound as if nothing had been."""
    if stage.book.exists():
        stage.book.chmod(0o644)
    done = stage.call(stage.wind())
    assert done.code == 0 and done.answer["turns"] == TURNS, done
    assert abs(stage.served.true_turns - TURNS) <= 0.01
    assert stage.coils()[0].outcome == "finished"


def already_whole(stage: Stage) -> None:
    """The coil came right by itself, and within a turn of what was asked for in truth."""
    assert stage.served.count_turns == TURNS
    assert abs(stage.served.true_turns - TURNS) <= 1.1, stage.served.true_turns


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
