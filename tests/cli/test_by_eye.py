"""The commands on a bench without a board, whose counter is read by eye."""

from __future__ import annotations

import json
import zipfile
from pathlib import Path

import pytest

from tests.cli import recipes
from tests.cli.processes import at_terminal
from windctl.book.open import open_book
from windctl.cli.exit_codes import ExitCode
from windctl.cli.main import run
from windctl.desk import places
from windctl.record.events import CounterRead

MACHINE = Path(__file__).parents[2] / "recipes/machines/counter-read.toml"
ON_IT = ("--machine", str(MACHINE))
NO_BOARD = "this machine has no board and no port, its counter is read by eye"


def slower(recipe: Path) -> Path:
    """As its motor turns."""
    recipe.write_text(recipe.read_text(encoding="utf-8").replace("rpm = 1000", "rpm = 900"), encoding="utf-8")
    return recipe


def small(folder: Path, turns: int = 150) -> Path:
    """A small coil for turns."""
    return slower(recipes.to_turns(folder, turns))


Printed = pytest.CaptureFixture[str]


def test_a_whole_coil_by_typed_words(tmp_path: Path, capsys: Printed) -> None:
    """With a slip of the pen, a reading on the way, and a turn too many; 1 % of 150 turns allows it."""
    recipe, book = str(small(tmp_path, 150)), tmp_path / "shop.book"
    assert run(["plan", recipe, *ON_IT, "--json"]) == 0
    per_turn = json.loads(capsys.readouterr().out)["dcr_20c_ohm"] / 150
    with at_terminal("wind", recipe, *ON_IT, "--book", str(book), "--json") as session:
        session.shows("Wear eye protection")
        session.shows("windctl cannot start, slow or stop this machine: it says where to stop")
        session.shows("set the counter to 0; wind to 150 and read the counter; slow down at 100.")
        for typed, shown in (
            ("go", "wind on yourself, then type turn and what the counter says"),
            ("turn 100", "noted: 100 turns"),
            (f"read {100 * per_turn + 1:.1f}", "how warm is it beside the coil?"),
            (f"read {100 * per_turn + 1:.1f} 21,5", "ohm at 20 °C after 100 turns"),
            ("turn 1,5k", "1 500 is 1 350 turns past the stop at 150; if the counter really says so"),
            ("turn 151", "noted: 151 turns, 1 turn past the stop at 150"),
        ):
            session.types(f"{typed}\n")
            session.shows(shown)
        session.shows("read the resistance at turn 151")
        session.types(f"read {151 * per_turn + 1:.1f} 22\n")
        coil = json.loads(session.ends(0))
    assert (coil["outcome"], coil["turns"], coil["verdict"]) == ("finished", 151, "within")
    assert coil["reason"] == "1 turn more than asked for"
    assert coil["coil"].startswith("ql5-")
    assert coil["dcr_20c_ohm"] == pytest.approx(151 * per_turn, rel=0.02)
    assert "plant" not in coil
    with open_book(book) as opened:
        assert opened.verify().broken == ()


def test_a_coil_whose_command_was_killed_goes_on_where_its_record_ends(tmp_path: Path) -> None:
    book = tmp_path / "shop.book"
    recipe = str(small(tmp_path, 400))
    with at_terminal("wind", recipe, *ON_IT, "--book", str(book)) as session:
        session.shows("set the counter to 0")
        session.types("turn 230\n")
        session.shows("noted: 230 turns")
        session.process.kill()
        session.process.wait(10)
    with at_terminal("resume", "--book", str(book), "--json") as session:
        session.shows("the record ends at turn 230, say so if the counter differs; wind to 400")
        session.types("turn 241\n")
        session.shows("noted: 241 turns")
        session.types("end\n")
        coil = json.loads(session.ends(ExitCode.ENDED_EARLY))
    assert (coil["outcome"], coil["turns"]) == ("stopped", 241)
    with open_book(book) as opened:
        told = [event.turn for event in opened.events(coil["coil"]) if isinstance(event, CounterRead)]
        assert told == [230, 241]
        assert opened.verify().broken == ()


def test_ctrl_c_leaves_the_coil_open_and_says_who_stops_the_motor(tmp_path: Path) -> None:
    book = tmp_path / "shop.book"
    with at_terminal("wind", str(small(tmp_path)), *ON_IT, "--book", str(book)) as session:
        session.shows("set the counter to 0")
        session.types("turn 30\n")
        session.shows("noted: 30 turns")
        session.process.send_signal(2)
        session.ends(130)
        session.look()
    assert "Stop your own motor, the coil stays open: windctl resume ql5-" in session.seen


def test_without_somebody_who_types_nothing_is_begun(tmp_path: Path, capsys: Printed) -> None:
    book = tmp_path / "shop.book"
    wind = ["wind", str(small(tmp_path)), *ON_IT, "--book", str(book)]
    for more in (["--no-input"], []):  # standard input is no terminal here
        assert run([*wind, *more]) == ExitCode.USAGE
        assert f"{NO_BOARD} (spindle.counter" in capsys.readouterr().err
    assert not book.exists()
    assert run([*wind, "--dry-run"]) == 0
    assert "nothing was moved or recorded" in capsys.readouterr().out


@pytest.mark.parametrize(
    ("option", "value"),
    [("--port", "COM3"), ("--port", "virtual"), ("--speed", "4"), ("--plant-seed", "2")],
)
def test_options_of_a_port_or_a_simulation_have_no_meaning(
    tmp_path: Path, capsys: Printed, option: str, value: str
) -> None:
    recipe = str(small(tmp_path))
    assert run(["wind", recipe, *ON_IT, option, value]) == ExitCode.USAGE
    assert f"{option} has no meaning here: {NO_BOARD}" in capsys.readouterr().err


def test_readings_are_typed_or_none(tmp_path: Path, capsys: Printed) -> None:
    recipe = str(slower(recipes.to_resistance(tmp_path)))
    assert run(["plan", recipe, *ON_IT, "--readings", "live"]) == ExitCode.USAGE
    assert f"--readings live needs a board with a contact; {NO_BOARD}" in capsys.readouterr().err
    assert run(["plan", recipe, *ON_IT]) == 0
    shown = capsys.readouterr().out
    assert "check at turn" in shown
    assert "nothing counts for this program: it goes by the turns you type" in shown
    assert run(["plan", recipe, *ON_IT, "--readings", "none"]) == 0
    assert "check at turn" not in capsys.readouterr().out


def test_there_is_nothing_to_check_to_serve_or_to_open(tmp_path: Path, capsys: Printed) -> None:
    assert run(["machine", "check", *ON_IT]) == 0
    assert f"nothing to check: {NO_BOARD}" in capsys.readouterr().err
    assert run(["machine", "check", *ON_IT, "--json"]) == 0
    assert json.loads(capsys.readouterr().out)["steps"] == []
    assert run(["machine", "serve", *ON_IT]) == ExitCode.USAGE
    assert f"there is no board to simulate: {NO_BOARD}" in capsys.readouterr().err


def test_it_is_listed_and_diagnosed_as_what_it_is(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    folder = places.machines_folder()
    folder.mkdir(parents=True)
    (folder / "eye.toml").write_bytes(MACHINE.read_bytes())
    assert run(["machine", "list"]) == 0
    assert "none: its counter is read by eye" in capsys.readouterr().out
    assert run(["machine", "list", "--json"]) == 0
    listed = {one["machine"]: one for one in json.loads(capsys.readouterr().out)["machines"]}
    assert (listed["eye"]["port"], listed["eye"]["counter"]) == (None, "read")
    assert listed["virtual"]["counter"] == "board"
    assert run(["diagnose", "--machine", "eye"]) == 0
    (zipped,) = tmp_path.glob("*.zip")
    machine = json.loads(zipfile.ZipFile(zipped).read("machine.json"))
    assert '"counter": "read"' in json.dumps(machine)
