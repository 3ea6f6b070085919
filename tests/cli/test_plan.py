"""`windctl plan`, `recipe check` and `forecast`: nothing is connected, nothing is moved."""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import Any

import pytest

from tests.cli import recipes
from windctl.cli.main import run

Printed = pytest.CaptureFixture[str]

PLAN_KEYS = {
    "format", "recipe", "turns", "turns_sd", "dcr_20c_ohm", "dcr_sd_ohm", "wire_length_m", "wire_mass_g",
    "mean_turn_mm", "build_mm", "peak_build_mm", "crown", "fits", "duration_s", "wire_speed_mean_m_s",
    "wire_speed_peak_m_s", "program", "warnings",
}  # fmt: skip


def asked(capsys: Printed, *arguments: str) -> Any:
    """The JSON that a call answers with."""
    assert run([*arguments, "--json"]) == 0, capsys.readouterr().err
    return json.loads(capsys.readouterr().out)


def test_plan_answers_with_every_promised_key(tmp_path: Path, capsys: Printed) -> None:
    plan = asked(capsys, "plan", str(recipes.to_resistance(tmp_path)))
    assert set(plan) >= PLAN_KEYS
    assert plan["format"] == 1
    assert set(plan["recipe"]) >= {"name", "digest"}
    assert set(plan["program"]) >= {"segments", "digest"}
    assert plan["dcr_20c_ohm"] == pytest.approx(200.0, rel=0.01)
    assert plan["turns_sd"] > 0


def test_another_target_may_be_asked_for(tmp_path: Path, capsys: Printed) -> None:
    recipe = str(recipes.to_resistance(tmp_path))
    assert asked(capsys, "plan", recipe, "--turns", "250")["turns"] == 250
    for typed in ("0,22k", "0.22k", "220"):
        plan = asked(capsys, "plan", recipe, "--dcr", typed)
        assert plan["dcr_20c_ohm"] == pytest.approx(220.0, rel=0.01)


def test_a_thousandfold_slip_is_refused_where_nobody_can_be_asked(tmp_path: Path, capsys: Printed) -> None:
    recipe = str(recipes.to_resistance(tmp_path))
    assert run(["plan", recipe, "--dcr", "220k", "--no-input"]) == 2
    assert "220 ohm is meant" in capsys.readouterr().err


def test_two_targets_are_refused(tmp_path: Path, capsys: Printed) -> None:
    assert run(["plan", str(recipes.to_turns(tmp_path)), "--turns", "9", "--dcr", "200"]) == 2
    assert "give one of them" in capsys.readouterr().err


def test_plan_for_people_says_what_the_coil_will_be(tmp_path: Path, capsys: Printed) -> None:
    assert run(["plan", str(recipes.to_turns(tmp_path))]) == 0
    shown = capsys.readouterr().out
    for part in ("150 turns", "at 20 °C", "fits", "wire speed"):
        assert part in shown
    assert "the target" not in shown


def test_the_target_is_told_apart_from_what_the_planned_turns_would_give(
    tmp_path: Path, capsys: Printed
) -> None:
    """That the build is not known better is told as well: packing of a scatter to a tenth (our prior)."""
    assert run(["plan", str(recipes.to_resistance(tmp_path))]) == 0
    shown = capsys.readouterr().out
    assert re.search(
        r"resistance  200\.0 ohm at 20 °C, the target; 200 ± \d+ ohm if it stopped at turn \d+", shown
    )
    assert re.search(r"build +\d\.\d ± \d\.\d mm", shown)


@pytest.mark.parametrize("command", [["plan"], ["wind"], ["recipe", "check"]], ids=" ".join)
def test_a_bad_recipe_is_told_with_every_place_and_nothing_else_happens(
    tmp_path: Path, capsys: Printed, home: Path, command: list[str]
) -> None:
    file = recipes.to_turns(tmp_path)
    text = file.read_text(encoding="utf-8").replace("pitch_mm = 0.22", "pitch_mm = -1\ncolour = 2")
    file.write_text(text, encoding="utf-8")
    assert run([*command, str(file)]) == 3
    told = capsys.readouterr().err
    assert told.count(f"{file}:") >= 2
    assert "Traceback" not in told
    assert not list(home.rglob("*.book"))


def test_recipe_check_names_the_sound_ones_and_tells_the_others(tmp_path: Path, capsys: Printed) -> None:
    good, bad = recipes.to_turns(tmp_path), tmp_path / "bad.toml"
    bad.write_text("format = 1\n", encoding="utf-8")
    assert asked(capsys, "recipe", "check", str(good))["recipes"][0]["name"] == "demo small coil"
    assert run(["recipe", "check", str(good), str(bad), "--json"]) == 3
    answer = json.loads(capsys.readouterr().out)
    assert [one["file"] for one in answer["recipes"]] == [str(good)]
    assert {one["file"] for one in answer["problems"]} == {str(bad)}


def readings(folder: Path, recipe: Path, capsys: Printed, factor: float = 1.0) -> Path:
    """What a meter without faults would show of the planned coil at 20 °C, leads included."""
    turns = [50, 100, 150]
    lines = ["turn,ohm,celsius"]
    for turn in turns:
        plan = asked(capsys, "plan", str(recipe), "--turns", str(turn))
        lines.append(f"{turn},{(plan['dcr_20c_ohm'] + 0.5) * factor:.6f},20.0")
    file = folder / "readings.csv"
    file.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return file


def test_forecast_from_readings_meets_what_they_came_from(tmp_path: Path, capsys: Printed) -> None:
    recipe = recipes.to_turns(tmp_path, 200)
    whole = asked(capsys, "plan", str(recipe))["dcr_20c_ohm"]
    answer = asked(capsys, "forecast", str(recipe), str(readings(tmp_path, recipe, capsys)))
    rows = answer["rows"]
    assert [row["turn"] for row in rows] == [50.0, 100.0, 150.0]
    assert all(row["used"] and row["at_turn"] == 200.0 for row in rows)
    assert rows[-1]["low_ohm"] < whole < rows[-1]["high_ohm"]
    assert rows[-1]["sd_ohm"] < rows[0]["sd_ohm"]
    assert answer["alarm"] is None
    assert "stop_turn" not in rows[0]


def test_forecast_for_another_turn_and_with_a_resistance_target(tmp_path: Path, capsys: Printed) -> None:
    recipe = recipes.to_resistance(tmp_path)
    file = readings(tmp_path, recipe, capsys)
    rows = asked(capsys, "forecast", str(recipe), str(file), "--at-turn", "180")["rows"]
    assert rows[0]["at_turn"] == 180.0
    assert rows[0]["stop_turn_sd"] > 0
    assert run(["forecast", str(recipe), str(file)]) == 0
    assert "stop at" in capsys.readouterr().out


def test_readings_in_kilo_ohm_without_a_k_are_refused_where_nobody_can_be_asked(
    tmp_path: Path, capsys: Printed
) -> None:
    recipe = recipes.to_turns(tmp_path, 200)
    file = readings(tmp_path, recipe, capsys, factor=0.001)
    assert run(["forecast", str(recipe), str(file), "--no-input"]) == 2
    assert "thousandth" in capsys.readouterr().err


def test_a_bad_readings_file_is_told_with_its_line(tmp_path: Path, capsys: Printed) -> None:
    recipe, file = recipes.to_turns(tmp_path), tmp_path / "readings.csv"
    file.write_text("turn,ohm,celsius\n10,5.0\n", encoding="utf-8")
    assert run(["forecast", str(recipe), str(file)]) == 3
    assert f"{file}:2:" in capsys.readouterr().err
