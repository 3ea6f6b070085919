"""The computer dies in mid-coil: the board stops by itself, the record holds, and the coil goes on."""

from __future__ import annotations

import os
import random
import time
from concurrent.futures import ProcessPoolExecutor
from dataclasses import dataclass
from pathlib import Path

import pytest

from tests.cli.processes import answer, begun, call, until
from tests.run.bench_side import Served
from tests.run.winding import SHIPPED, order, with_key, with_stop
from windctl.book.open import open_book
from windctl.lay.program import Program
from windctl.protocol.messages import State as BoardState
from windctl.record.events import StatusHeard

TURNS = 150
KILLS = 6
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


def trial(job: tuple[Path, int]) -> Killed:
    """Kill `wind` at a random moment, check the board and the book, and wind the coil to its end."""
    folder, seed = job
    os.environ["XDG_STATE_HOME"] = str(folder)
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
            time.sleep(random.Random(seed).uniform(0.0, 14.0))
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
        verified = call("coils", "verify", "--json", *common[:2])
        assert verified.returncode == 0 and answer(verified)["broken"] == [], verified.stdout
        resumed = call("resume", head.number, "--json", *common, timeout=120)
        assert resumed.returncode == 0, resumed.stderr + resumed.stdout
        result = answer(resumed)
        _, wanted = order(RECIPE)
        assert result["program_digest"] == wanted.plan.program.digest
        assert result["outcome"] == "finished"
        assert call("coils", "verify", *common[:2]).returncode == 0
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


def kill(folder: Path, n: int) -> None:
    """`n` trials, a few at a time; prints the worst of each figure."""
    with ProcessPoolExecutor(max_workers=3) as pool:
        trials = list(pool.map(trial, [(folder, seed) for seed in range(n)]))
    braked = [each.brake_after_beat for each in trials if each.brake_after_beat is not None]
    print(
        f"\n{n} kills between turn {min(t.killed_at_turn for t in trials):.1f} and "
        f"{max(t.killed_at_turn for t in trials):.1f}: braking at most {max(braked, default=0)} ms after "
        f"the last beat ({len(braked)} while turning), at most {max(t.lost for t in trials)} ms of facts lost"
    )
    assert braked, "no trial caught the spindle turning"
    assert max(braked) <= SILENCE_TICKS
    assert max(each.lost for each in trials) <= MOST_LOST_TICKS
    assert all(each.turns == TURNS and each.guide_ok for each in trials)


@pytest.mark.timeout(600)
def test_a_killed_host_costs_nothing_but_time(tmp_path: Path) -> None:
    kill(tmp_path, KILLS)


@pytest.mark.long
@pytest.mark.timeout(7200)
def test_a_hundred_killed_hosts(tmp_path: Path) -> None:
    kill(tmp_path, 100)


@pytest.mark.timeout(200)
def test_a_rebooted_board_makes_the_turn_a_question(tmp_path: Path) -> None:
    recipe, book = tmp_path / "coil.toml", tmp_path / "coils.book"
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
