"""Where a fault is played out: a served board, a recipe, a book, and windctl as a process beside them."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any, TypeVar

from tests.cli.processes import Session, until
from tests.run.bench_side import Served
from tests.run.winding import ROOT, SHIPPED, with_key, with_stop
from windctl.book.heads import CoilHead
from windctl.book.open import open_book
from windctl.machine.plant.faults import Faults
from windctl.protocol.messages import Cause
from windctl.protocol.messages import State as BoardState
from windctl.record.events import BoardGreeted, CoilFinished, HoldRequested, LinkLost, Tripped
from windctl.run.trips import trip_name

Fact = TypeVar("Fact")

TURNS = 60
RECIPE = with_stop(SHIPPED, turns=TURNS, tolerance_pct=0.5)
for _key, _value in {
    "start_rpm": 300,
    "start_turns": 2,
    "finish_rpm": 300,
    "finish_turns": 2,
    "cruise_rpm": 800,
    "ramp_rpm_per_s": 300,
}.items():
    RECIPE = with_key(RECIPE, _key, _value)

WINDCTL = [sys.executable, "-m", "windctl"]


@dataclass(frozen=True)
class Ended:
    """How a windctl process ended."""

    code: int
    out: str
    err: str

    @property
    def answer(self) -> Any:
        """The JSON that it printed."""
        return json.loads(self.out)


class Stage:
    """One board and one book. `door`: "tcp" or "pty"."""

    def __init__(self, folder: Path, door: str = "tcp", faults: Faults | None = None) -> None:
        self.folder = folder
        self.door = door
        self.book = folder / "shop.book"
        self.recipe = folder / "coil.toml"
        self.recipe.write_text(RECIPE, encoding="utf-8")
        self.served = Served(RECIPE, pty=door == "pty", faults=faults)

    def close(self) -> None:
        """Switch the machine off."""
        self.served.stop()

    # ------------------------------------------------------------ windctl

    def wind(self, *more: str) -> list[str]:
        """The arguments of `wind` here."""
        port = () if "--port" in more else ("--port", self.served.url)
        book = ("--book", str(self.book))
        return ["wind", str(self.recipe), "--machine", "virtual", "--json", *port, *book, *more]

    def resume(self, *more: str) -> list[str]:
        """The arguments of `resume` here; the port as the record has it, unless given."""
        return ["resume", "--json", "--book", str(self.book), *more]

    @contextmanager
    def begun(self, arguments: list[str], *, afflicted: str = "") -> Iterator[subprocess.Popen[str]]:
        """windctl while it runs, nobody at its terminal; ended by force if it is left running."""
        command = [sys.executable, "-m", "tests.run.afflicted", afflicted] if afflicted else WINDCTL
        with subprocess.Popen(
            [*command, *arguments, *([] if "--no-input" in arguments else ["--no-input"])],
            cwd=ROOT,
            stdin=subprocess.DEVNULL,
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            text=True,
        ) as process:
            try:
                yield process
            finally:
                if process.poll() is None:
                    process.send_signal(signal.SIGCONT)
                    process.kill()

    def done(self, process: subprocess.Popen[str], seconds: float = 60.0) -> Ended:
        """Wait for its end."""
        out, err = process.communicate(timeout=seconds)
        return Ended(process.returncode, out, err)

    def call(self, arguments: list[str], *, afflicted: str = "", seconds: float = 90.0) -> Ended:
        """Run windctl to its end."""
        with self.begun(arguments, afflicted=afflicted) as process:
            return self.done(process, seconds)

    @contextmanager
    def at_terminal(self, arguments: list[str], *, felt: bool = False) -> Iterator[Session]:
        """windctl with somebody at its terminal. `felt`: it leads a session there, so that closing it is
        felt."""
        import pty
        import tty

        terminal, child = pty.openpty()
        tty.setraw(child)
        if felt:
            name = os.ttyname(child)
            os.close(child)
            process = subprocess.Popen(
                [sys.executable, "-m", "tests.run.afflicted", f"terminal={name}", *arguments],
                cwd=ROOT,
                stdin=subprocess.DEVNULL,
                stdout=subprocess.PIPE,
                text=True,
                start_new_session=True,
            )
        else:
            process = subprocess.Popen(
                [*WINDCTL, *arguments], cwd=ROOT, stdin=child, stderr=child, stdout=subprocess.PIPE, text=True
            )
            os.close(child)
        with process:
            session = Session(process, terminal)
            try:
                yield session
            finally:
                if process.poll() is None:
                    process.kill()
                if session.terminal >= 0:
                    os.close(session.terminal)

    # ------------------------------------------------------------ the bench

    def until_turn(self, turn: float) -> None:
        """Wait until the spindle turns beyond a turn."""
        until(lambda: self.served.turning and self.served.count_turns >= turn, 60)

    def until_standing(self) -> None:
        """Wait until nothing turns."""
        until(lambda: self.served.standing, 20)

    @property
    def board(self) -> str:
        """The board's state, and its cause: "held (silence)"."""
        board = self.served.bench.board
        cause = Cause(board.cause).name.lower().replace("_", " ")
        return f"{BoardState(board.state).name.lower().replace('_', ' ')} ({cause})"

    # ------------------------------------------------------------ the book

    def coils(self) -> tuple[CoilHead, ...]:
        """All coils in the book; every record verifies."""
        if not self.book.exists():
            return ()
        with open_book(self.book, create=False) as book:
            report = book.verify()
            assert report.broken == (), report
            return book.list()

    def facts(self, *kinds: type[Fact]) -> list[Fact]:
        """Facts of these kinds of the one coil."""
        (head,) = self.coils()
        with open_book(self.book, create=False) as book:
            return [event for event in book.events(head.number) if isinstance(event, kinds)]

    def why(self) -> str:
        """What the record gives as reasons: of holds, of a lost line, of the end."""
        reasons: list[str] = []
        boots: set[int] = set()
        for event in self.facts(BoardGreeted, HoldRequested, LinkLost, Tripped, CoilFinished):
            match event:
                case BoardGreeted():
                    boots.add(event.identity.boot)
                    reason = "the board started anew" if len(boots) > 1 else ""
                case Tripped():
                    reason = f"trip {trip_name(event.trip)}"
                case _:
                    reason = event.reason
            if reason and reason not in reasons:
                reasons.append(reason)
        return "; ".join(reasons)
