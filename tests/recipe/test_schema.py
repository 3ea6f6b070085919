"""The recipes' schema in the hands of a real TOML linter and language server, as an editor uses it."""

from __future__ import annotations

import json
import re
from pathlib import Path

import pytest

from tests.recipe.language_server import editor, linted
from windctl.cli.main import run

FOLDER = Path(__file__).parents[2] / "recipes"
READY = sorted(FOLDER.glob("*.toml"))
CONFIGURATION = '[[schemas]]\npath = "recipe.schema.json"\ninclude = ["*.toml"]\n'


@pytest.fixture
def shop(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> Path:
    """A folder with all ready recipes, the schema as the command prints it, and a linter's configuration."""
    assert run(["recipe", "schema"]) == 0
    (tmp_path / "recipe.schema.json").write_text(capsys.readouterr().out, encoding="utf-8")
    (tmp_path / ".tombi.toml").write_text(CONFIGURATION, encoding="utf-8")
    for file in READY:
        (tmp_path / file.name).write_text(file.read_text(encoding="utf-8"), encoding="utf-8")
    return tmp_path


def spoilt(shop: Path, pattern: str, by: str) -> tuple[str, int]:
    """A ready recipe with one line changed: its file's name, and that line (from 1)."""
    lines = (shop / READY[0].name).read_text(encoding="utf-8").splitlines()
    (number,) = (number for number, line in enumerate(lines) if re.match(pattern, line))
    lines[number] = by
    (shop / "spoilt.toml").write_text("\n".join(lines), encoding="utf-8")
    return "spoilt.toml", number + 1


def test_a_linter_finds_nothing_wrong_with_the_ready_recipes(shop: Path) -> None:
    assert len(READY) >= 8
    assert linted(shop, *(file.name for file in READY)) == (0, [])


@pytest.mark.parametrize(
    ("pattern", "by", "said"),
    [
        ("core_length_mm = ", 'core_length_mm = "56"', "expected a value of type Float, but found String"),
        ("core_width_mm = ", "core_widht_mm = 6", '"core_widht_mm" is not allowed'),
        ("margin_mm = ", "margin_mm = 1e9", "the value must be ≤ 500, but found 1000000000"),
        (
            "mounted = ",
            'mounted = "sideways"',
            'the value must be one of ["face out", "face in"], but found "sideways"',
        ),
        ("start_turns = ", "start_turns = 2.5", "expected a value of type Integer, but found Float"),
        (r"\[spindle\]", "[spindel]", '"spindel" is not allowed'),
        ("tolerance_pct = ", "tolerance_pct = 0", "the value must be > 0, but found 0"),
        ("format = ", "format = 2", "the value must be ≤ 1, but found 2"),
    ],
)
def test_the_linter_finds_what_is_wrong_where_it_is(shop: Path, pattern: str, by: str, said: str) -> None:
    name, line = spoilt(shop, pattern, by)
    code, found = linted(shop, name)
    assert code == 1
    assert (line, said) in [(entry["range"]["start"]["line"], entry["message"]) for entry in found]


def test_an_editor_explains_a_key_and_underlines_a_slip(shop: Path) -> None:
    (shop / ".tombi.toml").unlink()  # by the comment at the top alone, as `recipe schema --help` says
    name, line = spoilt(shop, "flange_gap_mm = ", "flange_gap_mm = -9.5")
    file = shop / name
    file.write_text("#:schema recipe.schema.json\n" + file.read_text(encoding="utf-8"), encoding="utf-8")
    with editor(shop) as session:
        (slip,) = session.opened(file)
        assert slip["range"]["start"] == {"line": line, "character": len("flange_gap_mm = ")}
        explained = session.hover(file, line, 3)
    assert "free height between the flanges [mm]" in explained
    assert "`500`" in explained


def test_the_schema_is_one_and_names_every_table(capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["recipe", "schema"]) == 0
    schema = json.loads(capsys.readouterr().out)
    assert schema["$schema"] == "https://json-schema.org/draft/2020-12/schema"
    tables = {"bobbin", "coil", "wire", "lay", "spindle", "tension", "stop"}
    assert tables < set(schema["properties"])
    assert set(schema["required"]) == {"format", "name", *tables} - {"tension"}
