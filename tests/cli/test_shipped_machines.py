"""Coils on each kind of machine that is shipped with the recipes, through the real command, simulated."""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import Any

import pytest

from windctl.cli.main import run

RECIPES = Path(__file__).parents[2] / "recipes"
TURNS = 150


def shortened(recipe: str, folder: Path) -> Path:
    """The ready recipe with fewer turns, or the resistance of about as many."""
    text = (RECIPES / f"{recipe}.toml").read_text(encoding="utf-8")
    for key, value in (("turns", TURNS), ("dcr_20c_ohm", 100), ("min_turns", 120), ("max_turns", 200)):
        text = re.sub(rf"^{key} = \d+", f"{key} = {value}", text, flags=re.MULTILINE)
    file = folder / f"{recipe}.toml"
    file.write_text(text, encoding="utf-8")
    return file


def wound(recipe: str, machine: str, folder: Path, capsys: pytest.CaptureFixture[str]) -> Any:
    """What `wind --json` says of it."""
    arguments = [
        "--machine",
        str(RECIPES / "machines" / f"{machine}.toml"),
        "--port",
        "virtual",
        "--no-input",
    ]
    book = str(folder / "coils.book")
    code = run(["wind", str(shortened(recipe, folder)), *arguments, "--book", book, "--json", "-q"])
    shown = capsys.readouterr()
    assert code == 0, shown.err
    return json.loads(shown.out)


def test_a_foot_on_the_pedal_starts_what_a_hand_guides(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    coil = wound("neck-single-by-hand", "hand-guided", tmp_path, capsys)
    assert (coil["outcome"], coil["turns"]) == ("finished", TURNS)
    assert coil["coil"].startswith("ql3-")
    assert coil["plant"]["true_turns"] == pytest.approx(TURNS, abs=0.1)


def test_what_only_counts_is_stopped_by_a_person_and_counted_all_the_same(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    coil = wound("neck-single-by-hand", "counter-only", tmp_path, capsys)
    assert coil["outcome"] == "finished"
    # One count a turn: the turn under way does not show. A person stops within 300 ms at 60 rpm.
    assert coil["plant"]["true_turns"] == pytest.approx(coil["turns"], abs=1.0)
    assert coil["turns"] == pytest.approx(TURNS, abs=1.0)


def test_a_bench_that_reads_at_rest(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    coil = wound("bridge-single-with-checks", "guided-checks", tmp_path, capsys)
    assert coil["outcome"] == "finished"
    assert coil["target"] == {"kind": "dcr_20c_ohm", "value": 100.0}
    assert 120 <= coil["turns"] <= 200


def test_a_machine_that_does_it_all(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    coil = wound("bass-single-scatter", "guided-live", tmp_path, capsys)
    assert (coil["outcome"], coil["verdict"], coil["turns"]) == ("finished", "within", TURNS)
