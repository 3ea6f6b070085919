"""`windctl coils compare` on coils that were wound on the simulated machine."""

from __future__ import annotations

import json
import re
from pathlib import Path
from typing import Any
from xml.etree import ElementTree

import pytest

from tests.cli import recipes
from windctl.cli.main import run

Printed = pytest.CaptureFixture[str]


@pytest.fixture(scope="module")
def book(tmp_path_factory: pytest.TempPathFactory) -> str:
    """Two coils of one recipe with other wire, one of another pitch, one of which nothing was read."""
    folder = tmp_path_factory.mktemp("compared")
    path = str(folder / "shop.book")
    recipe = recipes.to_turns(folder)
    wider = folder / "wider.toml"
    wider.write_text(
        recipe.read_text(encoding="utf-8").replace("pitch_mm = 0.22", "pitch_mm = 0.25"), encoding="utf-8"
    )
    for file, more in (
        (recipe, ()),
        (recipe, ("--plant-seed", "4")),
        (wider, ()),
        (recipe, ("--readings", "none")),
    ):
        assert run(["wind", str(file), "--machine", "virtual", "-q", "--book", path, *more]) == 0
    return path


def asked(capsys: Printed, *arguments: str) -> Any:
    capsys.readouterr()
    assert run(["coils", "compare", *arguments, "--json"]) == 0
    return json.loads(capsys.readouterr().out)


def test_curves_programs_and_settings(book: str, capsys: Printed) -> None:
    answer = asked(capsys, "1", "2", "3", "--book", book)
    assert not answer["same_program"]
    digests = [coil["program_digest"] for coil in answer["coils"]]
    assert digests[0] == digests[1] != digests[2]
    assert {one["name"]: one["values"] for one in answer["settings"]} == {
        "machine": ["virtual, plant seed 1", "virtual, plant seed 4", "virtual, plant seed 1"],
        "recipe.lay.pitch_mm": [0.22, 0.22, 0.25],
    }
    first, second, _ = (coil["dcr_20c_ohm"] for coil in answer["coils"])
    assert set(answer["difference_ohm"][0]) == {0.0}
    # the curve's end is the turning coil's last reading, a settled one came after it
    assert answer["difference_ohm"][1][-1] == pytest.approx(second - first, abs=0.004 * first)
    assert answer["turns"][-1] == pytest.approx(150, abs=2)


def test_it_is_told_and_drawn(book: str, tmp_path: Path, capsys: Printed) -> None:
    drawing = tmp_path / "compared.svg"
    capsys.readouterr()
    assert run(["coils", "compare", "1", "2", "3", "4", "--book", book, "--svg", str(drawing)]) == 0
    words = capsys.readouterr().out
    assert "as A" in words
    assert re.search(r"v1-\d+-0004 has no curve: its resistance was not read while it was wound", words)
    assert words.count("B") > 40  # its curve is drawn with its letter
    assert "recipe.lay.pitch_mm" in words
    root = ElementTree.parse(drawing).getroot()
    assert len([one for one in root.iter() if one.tag.endswith("polyline")]) == 3
    assert any((one.text or "").startswith("ohm at 20 °C less that of v1-") for one in root.iter())


def test_a_coil_is_like_itself_and_named_once(book: str, capsys: Printed) -> None:
    for arguments, words in ((("1",), "at least two"), (("1", "1"), "named twice")):
        assert run(["coils", "compare", *arguments, "--book", book]) == 2
        assert words in capsys.readouterr().err
    assert run(["coils", "compare", "1", "4", "--book", book, "--svg", "x.svg"]) == 1
    assert "nothing to draw" in capsys.readouterr().err
