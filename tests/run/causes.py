"""What is done to a run to cause each fault, and what makes it whole again."""

from __future__ import annotations

import json
import os
import re
import signal
import sqlite3
import time
from collections.abc import Callable
from contextlib import closing

from tests.cli.processes import Session, until
from tests.run.stage import TURNS, Ended, Stage
from windctl.book.open import open_book
from windctl.record.events import WentOn

AT_TURN = 12.0
WIRE_BREAKS_AT = 22


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
