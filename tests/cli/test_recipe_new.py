"""`windctl recipe new`: what is asked, what is asked again, and that nothing half-made is left."""

from __future__ import annotations

import io
import json
import re
import signal
import sys
import time
from pathlib import Path

import pytest

from tests.cli.processes import at_terminal
from windctl.cli.main import run
from windctl.recipe.load import load_recipe

Printed = pytest.CaptureFixture[str]

ANSWERS = "Neck\n52,5\n6\n11\n8.5\n\nAWG 42\n\n\n8000\n"


def answered(monkeypatch: pytest.MonkeyPatch, answers: str, *arguments: str) -> int:
    """The exit code of `recipe new` with these lines on standard input."""
    monkeypatch.setattr(sys, "stdin", io.StringIO(answers))
    return run(["recipe", "new", *arguments])


def test_ten_answers_make_a_recipe(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: Printed) -> None:
    file = tmp_path / "neck.toml"
    assert answered(monkeypatch, ANSWERS, str(file), "--json") == 0
    shown = capsys.readouterr()
    recipe = load_recipe(file)
    assert json.loads(shown.out) == {
        "format": 1,
        "file": str(file),
        "name": "Neck",
        "digest": recipe.digest,
    }
    assert recipe.bobbin.core_length_mm == 52.5
    assert recipe.stop.turns == 8000
    assert shown.err.count(": ") >= 10  # the questions do not stand among the results


@pytest.mark.parametrize(
    ("answers", "said"),
    [
        ("\x07\n" + ANSWERS, "a name has 1 to 80 printable characters"),
        (ANSWERS.replace("52,5", "nan\n52,5"), "nan mm: it must be more than 0 mm and at most 500 mm"),
        (ANSWERS.replace("52,5", "-3\n52,5"), "-3 mm: it must be more than 0 mm and at most 500 mm"),
        (ANSWERS.replace("52,5", "long\n52,5"), "'long' is not a number"),
        (ANSWERS.replace("\n6\n", "\n60\n6\n"), "at most the core's length, 52.5 mm"),
        (ANSWERS.replace("8.5\n\n", "8.5\nleft\n\n"), "'left' is none of cw, ccw"),
        (ANSWERS.replace("AWG 42", "AWG 99\nAWG 42"), "'AWG 99': outside AWG 1 to AWG 56"),
        (
            ANSWERS.replace("AWG 42", "42\nAWG 42"),
            "42 mm bare: it must be from 0.01 to 1 mm; a number is written",
        ),
        (ANSWERS.replace("42\n\n", "42\n0.05\n\n"), "0.05 mm: it must be from the bare 0.06334 mm to 1.2 mm"),
        (ANSWERS.replace("AWG 42\n\n", "AWG 30\n\n0.28\n"), "measure the wire and give wire.overall_mm"),
        (ANSWERS.replace("8000", "0\n8000"), "0 turns: it must be from 1 to 1000000 turns"),
        (ANSWERS.replace("8000", "a lot\n8000"), "'a lot' is not a resistance"),
    ],
)
def test_what_cannot_be_is_asked_again(
    answers: str, said: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: Printed
) -> None:
    file = tmp_path / "neck.toml"
    assert answered(monkeypatch, answers, str(file)) == 0
    shown = capsys.readouterr().err
    assert said in shown
    assert "Traceback" not in shown
    assert load_recipe(file).stop.turns == 8000


def test_a_resistance_with_a_k(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    file = tmp_path / "neck.toml"
    assert answered(monkeypatch, ANSWERS.replace("8000", "5,9k"), str(file)) == 0
    assert load_recipe(file).stop.dcr_20c_ohm == 5900


def test_answers_that_end_too_soon_leave_nothing(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: Printed
) -> None:
    assert answered(monkeypatch, "Neck\n52\n", str(tmp_path / "neck.toml")) == 2
    assert "ended before this question: Core: outside width" in capsys.readouterr().err
    assert list(tmp_path.iterdir()) == []


def test_nothing_is_written_over_and_nobody_is_asked_in_vain(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: Printed
) -> None:
    file = tmp_path / "neck.toml"
    file.write_text("mine", encoding="utf-8")
    assert answered(monkeypatch, ANSWERS, str(file)) == 2
    shown = capsys.readouterr().err
    assert "is there already" in shown
    assert "Core" not in shown
    assert file.read_text(encoding="utf-8") == "mine"
    assert answered(monkeypatch, ANSWERS, str(tmp_path / "other.toml"), "--no-input") == 2
    assert "ready recipes" in capsys.readouterr().err


def test_a_folder_that_is_not_there(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: Printed) -> None:
    assert answered(monkeypatch, ANSWERS, str(tmp_path / "none" / "neck.toml")) == 1
    assert "cannot be written: No such file or directory" in capsys.readouterr().err


def test_answers_that_are_each_possible_and_together_are_not(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: Printed
) -> None:
    file = tmp_path / "neck.toml"
    assert answered(monkeypatch, ANSWERS.replace("\n11\n", "\n0.05\n"), str(file)) == 3
    assert re.search(r"lay\.\w+ is .* stroke", capsys.readouterr().err)
    assert list(tmp_path.iterdir()) == []


def test_at_a_terminal_and_with_ctrl_c(tmp_path: Path) -> None:
    file = tmp_path / "neck.toml"
    with at_terminal("recipe", "new", str(file)) as session:
        session.shows("What the coil is called")
        session.types("Neck\n")
        session.shows("outside length")
        # A signal that comes just before Python begins to read is seen only when another wakes it.
        for _ in range(10):
            time.sleep(1.5)
            if session.process.poll() is not None:
                break
            session.process.send_signal(signal.SIGINT)
        session.ends(130)
    assert list(tmp_path.iterdir()) == []
