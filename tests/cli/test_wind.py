"""`windctl wind` and `resume`, from the command to the sealed record."""

from __future__ import annotations

import json
import re
import signal
import time
from pathlib import Path
from typing import Any

import pytest

from tests.cli import recipes
from tests.cli.processes import answer, at_terminal, begun, call, served, until
from windctl.book.open import open_book
from windctl.cli.main import run
from windctl.protocol.messages import State

Printed = pytest.CaptureFixture[str]

WIND_KEYS = {
    "format", "coil", "id", "outcome", "reason", "turns", "dcr_20c_ohm", "dcr_u95_ohm", "target", "batch",
    "verdict", "program_digest", "trace_digest", "record_digest",
}  # fmt: skip


@pytest.fixture
def book(tmp_path: Path) -> Path:
    """Where this test's coils go."""
    return tmp_path / "shop.book"


def wound(capsys: Printed, *arguments: str) -> Any:
    """The JSON of a coil that was wound in this process."""
    assert run([*arguments, "--machine", "virtual", "--json"]) == 0, capsys.readouterr().err
    return json.loads(capsys.readouterr().out)


def test_a_coil_to_turns_is_wound_recorded_and_verified(tmp_path: Path, book: Path, capsys: Printed) -> None:
    recipe = str(recipes.to_turns(tmp_path))
    coil = wound(capsys, "wind", recipe, "--book", str(book), "--batch", "lot 7", "--of", "3")
    assert set(coil) >= WIND_KEYS
    assert coil["outcome"] == "finished"
    assert coil["turns"] == 150
    assert coil["plant"]["true_turns"] == 150
    assert coil["target"] == {"kind": "turns", "value": 150}
    assert coil["batch"] == "lot 7"
    assert re.fullmatch(r"v1-\d{4}-0001", coil["coil"])
    assert coil["dcr_20c_ohm"] == pytest.approx(
        coil["plant"]["true_dcr_20c_ohm"], abs=3 * coil["dcr_u95_ohm"]
    )
    assert run(["coils", "verify", "--book", str(book)]) == 0
    assert run(["coils", "show", coil["coil"], "--book", str(book)]) == 0
    assert "lot 7" in capsys.readouterr().out


def test_a_coil_to_a_resistance_stops_at_it(tmp_path: Path, book: Path, capsys: Printed) -> None:
    coil = wound(
        capsys, "wind", str(recipes.to_resistance(tmp_path)), "--book", str(book), "--plant-seed", "5"
    )
    assert coil["outcome"] == "finished"
    assert coil["target"] == {"kind": "dcr_20c_ohm", "value": 200.0}
    assert 200 <= coil["turns"] <= 400
    assert coil["plant"]["true_dcr_20c_ohm"] == pytest.approx(200.0, rel=0.02)


def test_what_a_person_sees_goes_where_it_should(tmp_path: Path, book: Path, capsys: Printed) -> None:
    assert run(["wind", str(recipes.to_turns(tmp_path)), "--machine", "virtual", "--book", str(book)]) == 0
    printed = capsys.readouterr()
    assert "finished" in printed.out
    assert "150 turns" in printed.out
    assert " / 150 turns, " in printed.err  # how far it is, at the latest when it has come to rest
    assert " rpm, finish " in printed.err
    assert " rpm, finish " not in printed.out


def test_quiet_is_quiet(tmp_path: Path, book: Path, capsys: Printed) -> None:
    recipe = str(recipes.to_turns(tmp_path))
    assert run(["-q", "wind", recipe, "--machine", "virtual", "--book", str(book)]) == 0
    assert [line for line in capsys.readouterr().err.splitlines() if not line.startswith("caution:")] == []


def test_a_dry_run_needs_no_port(tmp_path: Path, capsys: Printed) -> None:
    profile = tmp_path / "north.toml"
    profile.write_text('format = 1\nname = "north"\n[spindle]\ndrive = "step"\ncounts_per_turn = 400\n')
    recipe = str(recipes.to_turns(tmp_path))
    assert run(["wind", recipe, "--machine", str(profile), "--dry-run"]) == 0
    assert "nothing was moved or recorded" in capsys.readouterr().out
    assert run(["wind", recipe, "--machine", str(profile)]) == 4


def test_a_dry_run_leaves_no_trace(tmp_path: Path, book: Path, capsys: Printed) -> None:
    recipe = str(recipes.to_turns(tmp_path))
    assert run(["wind", recipe, "--machine", "virtual", "--book", str(book), "--dry-run"]) == 0
    assert "nothing was moved" in capsys.readouterr().out
    assert not book.exists()


def test_the_same_seed_gives_the_same_coil_at_any_speed_in_any_place(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    recipe = str(recipes.to_resistance(tmp_path))
    told = []
    for speed, zone, hashing in (("0", "UTC", "1"), ("20", "Asia/Tokyo", "77")):
        monkeypatch.setenv("TZ", zone)
        monkeypatch.setenv("PYTHONHASHSEED", hashing)
        done = call(
            "wind", recipe, "--machine", "virtual", "--plant-seed", "7", "--speed", speed, "--json",
            "--book", str(tmp_path / f"{speed}.book"),
        )  # fmt: skip
        coil = answer(done)
        same = ("turns", "dcr_20c_ohm", "dcr_u95_ohm", "program_digest", "trace_digest", "plant")
        told.append([coil[key] for key in same])
    assert told[0] == told[1]


def test_no_such_port_is_no_machine(tmp_path: Path, book: Path, capsys: Printed) -> None:
    recipe = str(recipes.to_turns(tmp_path))
    assert (
        run(["wind", recipe, "--machine", "virtual", "--port", str(tmp_path / "tty"), "--book", str(book)])
        == 4
    )
    assert "Traceback" not in capsys.readouterr().err


def interrupted(recipe: Path, book: Path, number: int, *more: str) -> str:
    """Wind, strike with a signal once it turns, and give back what was said; the coil is open then."""
    with begun("wind", str(recipe), "--book", str(book), "--json", *more) as process:
        assert process.stderr is not None
        said = ""
        while "turning:" not in said:
            line = process.stderr.readline()
            assert line, said
            said += line
        process.send_signal(number)
        process.send_signal(number)
        out, rest = process.communicate(timeout=30)
    assert process.returncode == 130, said + rest
    assert json.loads(out)["outcome"] == "open"
    assert "windctl resume" in rest
    assert "Traceback" not in said + rest
    return said + rest


@pytest.mark.parametrize("name", ["SIGINT", "SIGTERM", "SIGHUP"])
def test_a_signal_leaves_a_held_and_recorded_coil(tmp_path: Path, book: Path, name: str) -> None:
    said = interrupted(
        recipes.to_turns(tmp_path), book, getattr(signal, name), "--machine", "virtual", "--speed", "2"
    )
    assert f"{'Ctrl-C' if name == 'SIGINT' else name}: holding" in said
    with open_book(book) as opened:
        (head,) = opened.open_coils()
        kinds = [event.kind for event in opened.events(head.number)]
    assert kinds.count("hold_requested") == 1
    assert kinds.index("hold_requested") < len(kinds) - kinds[::-1].index("held")


def test_a_simulated_coil_that_was_left_goes_on_only_at_a_confirmed_turn(
    tmp_path: Path, book: Path, capsys: Printed
) -> None:
    interrupted(recipes.to_turns(tmp_path), book, signal.SIGINT, "--machine", "virtual", "--speed", "2")
    with open_book(book) as opened:
        (head,) = opened.open_coils()
    common = ["resume", "--book", str(book)]
    assert run(common) == 2
    told = capsys.readouterr().err
    (stands,) = re.findall(rf"windctl resume {head.number} --at-turn ([\d.]+)", told)
    assert run([*common, "--at-turn", stands, "--dry-run"]) == 0
    capsys.readouterr()
    assert run([*common, "--at-turn", stands, "--json"]) == 0
    coil = json.loads(capsys.readouterr().out)
    assert coil["coil"] == head.number
    assert coil["program_digest"] == head.program_digest
    assert coil["turns"] == 150
    assert coil["plant"]["true_turns"] == pytest.approx(150, abs=0.01)
    whole = wound(capsys, "wind", str(recipes.to_turns(tmp_path)), "--book", str(tmp_path / "whole.book"))
    assert coil["plant"]["true_dcr_20c_ohm"] == pytest.approx(whole["plant"]["true_dcr_20c_ohm"], rel=0.003)
    assert coil["dcr_20c_ohm"] == pytest.approx(whole["dcr_20c_ohm"], rel=0.01)
    assert run(common) == 2
    assert "no coil is open" in capsys.readouterr().err


def test_a_served_board_goes_on_by_itself_from_its_own_count(tmp_path: Path, book: Path) -> None:
    recipe = recipes.to_turns(tmp_path, 40)
    with served(recipe) as (url, bench):
        port = ("--machine", "virtual", "--port", url)
        interrupted(recipe, book, signal.SIGINT, *port)
        until(lambda: bench.board.state != State.TURNING)
        at = bench.board.count
        done = call("resume", "--book", str(book), "--port", url, "--json", "--no-input")
        assert done.returncode == 0, done.stderr
        assert answer(done)["turns"] == 40
        assert bench.plant.truth().true_turns == 40
        assert 0 < at < 40 * 400
        assert "plant" not in answer(done)


def test_a_real_machine_never_turns_where_nobody_can_be_asked(tmp_path: Path, book: Path) -> None:
    recipe = recipes.to_turns(tmp_path)
    with served(recipe, real=True) as (url, bench):
        for more in (["--no-input"], []):  # standard input is no terminal in the second
            done = call(
                "wind", str(recipe), "--machine", "virtual", "--port", url, "--book", str(book), *more
            )
            assert done.returncode == 2, done.stderr
            assert "nothing was started" in done.stderr
        assert bench.plant.truth().true_turns == 0
        assert bench.board.state == State.DRIVES_OFF


def test_a_real_machine_turns_after_a_typed_go(tmp_path: Path, book: Path) -> None:
    recipe = recipes.to_turns(tmp_path, 30)
    with (
        served(recipe, real=True) as (url, bench),
        at_terminal(
            "wind", str(recipe), "--machine", "virtual", "--port", url, "--book", str(book), "--json"
        ) as session,
    ):
        session.shows("Type go")
        assert "eye protection" in session.seen
        assert bench.board.state == State.DRIVES_OFF
        session.types("yes\n")
        session.types("go\n")
        session.shows("turning")
        coil = json.loads(session.ends(0))
        assert coil["outcome"] == "finished"
        assert bench.plant.truth().true_turns == 30


def test_ctrl_c_at_the_terminal_before_the_go_turns_nothing(tmp_path: Path, book: Path) -> None:
    recipe = recipes.to_turns(tmp_path, 30)
    with (
        served(recipe, real=True) as (url, bench),
        at_terminal(
            "wind", str(recipe), "--machine", "virtual", "--port", url, "--book", str(book)
        ) as session,
    ):
        session.shows("Type go")
        session.process.send_signal(signal.SIGINT)
        session.ends(130)
        assert bench.plant.truth().true_turns == 0


def test_the_flanges_are_taught_by_typed_nudges(tmp_path: Path, book: Path) -> None:
    """On a machine that is taken for a real one: nothing turns before its own go, and it begins there."""
    recipe = recipes.to_turns(tmp_path, 30)
    with (
        served(recipe, real=True) as (url, bench),
        at_terminal(
            "wind", str(recipe), "--machine", "virtual", "--port", url, "--book", str(book), "--json"
        ) as session,
    ):
        session.shows("Type go")
        session.types("dry pass\n")
        session.shows("Type go and Enter to let the guide move")
        session.types("go\n")
        session.shows("the guide stands at its far end")
        far = bench.plant.guide.motor
        session.types("nudge 1,5\n")
        session.shows("1.5 mm are more than the 1 mm of one nudge")
        session.types("nudge 0,15\n")
        session.shows("Nudging has come to +0.15 mm")
        assert bench.plant.guide.motor == far + 30
        session.types("seen\n")
        session.shows("the guide stands at its start")
        assert bench.plant.guide.motor == 30
        session.types("nudge -0.05\n")
        session.shows("Nudging has come to +0.10 mm")
        session.types("seen\n")
        session.shows("its far end again, nudged since")
        session.types("seen\n")
        until(lambda: bench.plant.guide.motor == 20 and bench.board.state == State.DRIVES_OFF)
        assert bench.plant.truth().true_turns == 0
        time.sleep(0.5)  # until it is asked for
        session.types("go\n")
        coil = json.loads(session.ends(0))
    shown = call("coils", "show", coil["coil"], "--book", str(book)).stdout
    assert "nudged at its far end, by the operator: 0.15 mm towards the far flange" in shown
    assert "nudged by +0.10 mm in all from where it had been put" in shown
