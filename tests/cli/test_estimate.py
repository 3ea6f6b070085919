"""`windctl estimate`: an unknown coil from the command line."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from tests.cli import recipes
from windctl.cli.main import run

Printed = pytest.CaptureFixture[str]

COIL = ("estimate", "--ohm", "5.9k", "--celsius", "22.5", "--build", "4.9")
BOBBIN = ("--core-length", "56", "--core-width", "6", "--gap", "11")


def refused(capsys: Printed, *arguments: str) -> str:
    capsys.readouterr()
    assert run(list(arguments)) == 2
    return capsys.readouterr().err


def test_it_answers_with_wire_turns_and_length(capsys: Printed) -> None:
    assert run([*COIL, *BOBBIN, "--mass", "31.2", "--json"]) == 0
    answer = json.loads(capsys.readouterr().out)
    assert answer["format"] == 1
    assert answer["wires"][0]["size"] == "AWG 42"
    assert sum(wire["probability"] for wire in answer["wires"]) == pytest.approx(1.0)
    for figure in ("turns", "wire_length_m", "bare_mm", "packing"):
        assert answer[figure]["low"] < answer[figure]["value"] < answer[figure]["high"]
    assert answer["turns"]["value"] == pytest.approx(8000, rel=0.05)


def test_it_says_what_would_tell_more(capsys: Printed) -> None:
    assert run([*COIL, *BOBBIN]) == 0
    printed = capsys.readouterr()
    assert "against all others" in printed.out
    assert "--mass" in printed.err
    assert run([*COIL, *BOBBIN, "--mass", "31.2"]) == 0
    assert "--mass" not in capsys.readouterr().err


def test_the_bobbin_may_come_from_a_recipe(tmp_path: Path, capsys: Printed) -> None:
    recipe = str(recipes.to_turns(tmp_path))
    assert run([*COIL, "--bobbin", recipe, "--json"]) == 0
    from_recipe = json.loads(capsys.readouterr().out)
    assert run([*COIL, *BOBBIN, "--json"]) == 0
    assert json.loads(capsys.readouterr().out)["turns"] == from_recipe["turns"]
    assert "leave out what describes another one" in refused(capsys, *COIL, "--bobbin", recipe, "--gap", "11")


def test_it_writes_a_recipe_that_can_be_planned_and_wound(tmp_path: Path, capsys: Printed) -> None:
    file = tmp_path / "rewind.toml"
    write = (*COIL, *BOBBIN, "--flange-depth", "8", "--mass", "31.2", "--recipe", str(file))
    assert run([*write, "--json"]) == 0
    found = json.loads(capsys.readouterr().out)
    assert found["recipe"] == str(file)
    assert run(["recipe", "check", str(file)]) == 0
    capsys.readouterr()
    assert run(["plan", str(file), "--json"]) == 0
    plan = json.loads(capsys.readouterr().out)
    assert plan["dcr_20c_ohm"] == pytest.approx(found["dcr_20c_ohm"], rel=2e-3)
    assert plan["turns"] == pytest.approx(found["turns"]["value"], rel=0.03)
    assert "is there already" in refused(capsys, *write)


def test_what_cannot_be_is_refused(capsys: Printed) -> None:
    assert "give --core-length, --core-width, --gap" in refused(capsys, *COIL)
    assert "there is no such bobbin" in refused(
        capsys, *COIL, "--core-length", "6", "--core-width", "56", "--gap", "11"
    )
    assert "makes a coil of" in refused(
        capsys, "estimate", "--ohm", "5.9", "--celsius", "20", "--build", "4.9", *BOBBIN
    )
    assert "no more than the leads" in refused(
        capsys, "estimate", "--ohm", "0.3", "--celsius", "20", "--build", "4.9", *BOBBIN
    )
    assert run(["estimate", "--ohm", "5.9k", "--celsius", "20", "--build", "nan", *BOBBIN]) == 2
