"""The computer dies in mid-coil: the board stops by itself, the record holds, and the coil goes on."""

from __future__ import annotations

import random
import time
from collections.abc import Iterator
from concurrent.futures import Future, ThreadPoolExecutor
from dataclasses import dataclass
from functools import partial
from pathlib import Path

import pytest

from tests.cli.processes import answer, begun, call, until
from tests.run.bench_side import Served
from tests.run.winding import SHIPPED, order, with_key, with_stop
from windctl.book.open import open_book
from windctl.lay.program import Program
from windctl.protocol.messages import State as BoardState
from windctl.record.events import StatusHeard

TURNS = 90
SECONDS = 9.0  # of winding them
KILLS = 6
TOGETHER = 4  # trials at a time: they mostly wait
MOST_LOST_TICKS = 1000
SILENCE_TICKS = 2050

RECIPE = with_stop(SHIPPED, turns=TURNS, tolerance_pct=0.5)
for _key, _value in {
    "start_turns": 3,
    "finish_turns": 3,
    "cruise_rpm": 700,
    "ramp_rpm_per_s": 300,
}.items():
    RECIPE = with_key(RECIPE, _key, _value)


@dataclass(frozen=True)
class Killed:
    """One trial's figures, in board ticks (ms); None where the board was not turning when the host died."""

    killed_at_turn: float
    brake_after_beat: int | None
    lost: int
    turns: float
    guide_ok: bool


def trial(folder: Path, seed: int) -> Killed:
    """Kill `wind` at a random moment, check the board and the book, and wind the coil to its end."""
    recipe, book = folder / f"{seed}.toml", folder / f"{seed}.book"
    recipe.write_text(RECIPE, encoding="utf-8")
    common = ("--book", str(book), "--no-input")
    served = Served(RECIPE)
    board = served.bench.board
    try:
        with begun(
            "wind", str(recipe), "--machine", "virtual", "--port", served.url, "--json", *common
        ) as host:
            until(lambda: board.state == BoardState.TURNING, 60)
            time.sleep(random.Random(seed).uniform(0.0, SECONDS))
            turning = board.state == BoardState.TURNING and served.bench.outputs.rate != 0
            host.kill()
            killed_at, killed_turn = served.bench.ticks, board.count / board.counts_per_turn
            host.wait(10)
        until(lambda: served.standing, 15)
        until(lambda: served.bench.ticks > killed_at + 3000, 15)
        assert served.standing
        with open_book(book, create=False) as opened:
            (head,) = opened.list()
            last = max(e.status.ticks for e in opened.events(head.number) if isinstance(e, StatusHeard))
            report = opened.verify()
            assert (report.checked, report.broken) == (1, ())
        resumed = call("resume", head.number, "--json", *common, timeout=120)
        assert resumed.returncode == 0, resumed.stderr + resumed.stdout
        result = answer(resumed)
        _, wanted = order(RECIPE)
        assert result["program_digest"] == wanted.plan.program.digest
        assert result["outcome"] == "finished"
        verified = call("coils", "verify", "--json", *common[:2])
        assert verified.returncode == 0 and answer(verified)["broken"] == [], verified.stdout
        turns = served.true_turns
        assert board.count == TURNS * board.counts_per_turn
        braked = served.brake_after_beat(killed_at) if turning else None
        return Killed(
            killed_turn, braked, killed_at - last, turns, board.guide == guide_at(wanted.plan.program)
        )
    finally:
        served.stop()


def guide_at(program: Program) -> int:
    """Where the program has the guide at the end of the coil."""
    return program.place_of(TURNS * program.counts_per_turn).guide


def rebooted(folder: Path) -> None:
    """Kill `wind`, reset the board, and wind the coil to its end from the turn that is given."""
    recipe, book = folder / "coil.toml", folder / "coils.book"
    recipe.write_text(RECIPE, encoding="utf-8")
    common = ("--book", str(book), "--no-input")
    served = Served(RECIPE)
    board = served.bench.board
    try:
        with begun("wind", str(recipe), "--machine", "virtual", "--port", served.url, *common) as host:
            until(lambda: board.count > 20 * board.counts_per_turn, 60)
            host.kill()
            host.wait(10)
        until(lambda: served.standing, 15)
        turn = served.true_turns
        served.reboot()
        refused = call("resume", *common, timeout=60)
        assert refused.returncode == 2
        assert "--at-turn" in refused.stderr and "the board was reset since" in refused.stderr
        assert served.true_turns == turn
        told = call("resume", "--at-turn", f"{turn:.4f}", "--json", *common, timeout=120)
        assert told.returncode == 0, told.stderr
        assert answer(told)["turns"] == TURNS
        assert abs(served.true_turns - TURNS) < 0.01
    finally:
        served.stop()


def judged(trials: list[Killed]) -> None:
    """Print the worst of each figure, and hold them to the limits."""
    braked = [each.brake_after_beat for each in trials if each.brake_after_beat is not None]
    print(
        f"\n{len(trials)} kills between turn {min(t.killed_at_turn for t in trials):.1f} and "
        f"{max(t.killed_at_turn for t in trials):.1f}: braking at most {max(braked, default=0)} ms after "
        f"the last beat ({len(braked)} while turning), at most {max(t.lost for t in trials)} ms of facts lost"
    )
    assert braked, "no trial caught the spindle turning"
    assert max(braked) <= SILENCE_TICKS
    assert max(each.lost for each in trials) <= MOST_LOST_TICKS
    assert all(each.turns == TURNS and each.guide_ok for each in trials)


@dataclass(frozen=True)
class Playing:
    """Trials under way, each with a board and a book of its own."""

    rebooted: Future[None]
    killed: list[Future[Killed]]


@pytest.fixture(scope="module")
def playing(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Playing]:
    """All of them are begun when the first is looked at."""
    folder = tmp_path_factory.mktemp("killed")
    with ThreadPoolExecutor(TOGETHER) as pool:
        yield Playing(
            pool.submit(rebooted, tmp_path_factory.mktemp("rebooted")),
            [pool.submit(trial, folder, seed) for seed in range(KILLS)],
        )


@pytest.mark.timeout(600)
def test_a_killed_host_costs_nothing_but_time(playing: Playing) -> None:
    judged([each.result(500.0) for each in playing.killed])


@pytest.mark.timeout(600)
def test_a_rebooted_board_makes_the_turn_a_question(playing: Playing) -> None:
    playing.rebooted.result(500.0)


@pytest.mark.long
@pytest.mark.timeout(7200)
def test_a_hundred_killed_hosts(tmp_path: Path) -> None:
    with ThreadPoolExecutor(TOGETHER) as pool:
        judged(list(pool.map(partial(trial, tmp_path), range(100))))
