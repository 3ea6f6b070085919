"""Where to check a coil, and whether to read it again, from the command line."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from tests.cli import recipes
from windctl.cli.main import run

Printed = pytest.CaptureFixture[str]


def asked(capsys: Printed, *arguments: str) -> Any:
    capsys.readouterr()
    assert run([*arguments, "--json"]) == 0
    return json.loads(capsys.readouterr().out)


def test_plan_says_where_to_check_and_what_it_gains(tmp_path: Path, capsys: Printed) -> None:
    recipe = str(recipes.to_resistance(tmp_path))
    plan = asked(capsys, "plan", recipe, "--readings", "checks")
    check = plan["check"]
    assert 0.88 * plan["turns"] < check["turn"] < 0.97 * plan["turns"]
    assert check["without_u95_ohm"] == pytest.approx(1.96 * plan["dcr_sd_ohm"], rel=0.02)
    assert check["with_u95_ohm"] < 0.3 * check["without_u95_ohm"]
    assert run(["plan", recipe, "--readings", "checks"]) == 0
    assert f"check at turn {check['turn']:.0f}: the finish is known to ±" in capsys.readouterr().out
    assert asked(capsys, "plan", recipe)["check"] is None  # read live
    assert asked(capsys, "plan", str(recipes.to_turns(tmp_path)), "--readings", "checks")["check"] is None


def readings(tmp_path: Path, turn: int, ohm: float) -> str:
    file = tmp_path / f"{turn}.csv"
    file.write_text(f"turn,ohm,celsius,state\n{turn},{ohm},20,rest\n", encoding="utf-8")
    return str(file)


def test_forecast_says_where_to_check_next_and_whether_to_wait(tmp_path: Path, capsys: Printed) -> None:
    recipe = str(recipes.to_resistance(tmp_path))
    plan = asked(capsys, "plan", recipe)
    per_turn = plan["dcr_20c_ohm"] / plan["turns"]
    early = readings(tmp_path, 150, 150 * per_turn + 1.3)
    seen = asked(capsys, "forecast", recipe, early, "--readings", "checks")
    assert 150 < seen["check"]["turn"] <= plan["turns"] + 20
    assert seen["read_again"] is None
    end = readings(tmp_path, plan["turns"], 1.00275 * plan["dcr_20c_ohm"] + 1.3)
    at = ("--at-turn", str(plan["turns"]))
    again = asked(capsys, "forecast", recipe, end, *at)["read_again"]
    assert again["minutes"] == 9
    assert again["then_u95_ohm"] < again["now_u95_ohm"]
    assert again["ohm"] == pytest.approx(plan["dcr_20c_ohm"] + 0.5, rel=2e-3)
    assert run(["forecast", recipe, end, *at]) == 0
    assert "still warm: wait 9 minutes" in capsys.readouterr().out
