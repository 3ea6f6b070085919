"""The section through a bobbin in characters."""

from __future__ import annotations

import io
import re
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.cli import recipes
from windctl.cli.main import run
from windctl.cli.section import PLAIN, Pen, Section, drawn, resampled


def picture(heights: list[float], pen: Pen = PLAIN, gap: float = 6.0, depth: float = 6.0) -> list[str]:
    return drawn(Section(heights, gap, depth, "base"), pen)


def inside(lines: list[str]) -> list[str]:
    """What stands between the flanges."""
    return [match[1] for line in lines if (match := re.search(r"[|█ ](.*)[|█]$", line[5:]))]


def test_a_winding_between_its_flanges() -> None:
    # 12 rows of half a millimetre, 24 columns of a quarter: to scale in cells twice as high as wide
    assert picture([0.0, 3.0, 3.5, 3.25, 3.0, 0.0]) == [
        "     base (start)          face",
        "6 mm |                        |",
        "     |                        |",
        "     |                        |",
        "     |                        |",
        "     |                        |",
        "     |        ####::::        |",
        "     |    ################    |",
        "     |    ################    |",
        "     |    ################    |",
        "     |    ################    |",
        "     |    ################    |",
        "     |    ################    |",
        "0 mm ==========================",
    ]


@given(st.lists(st.floats(0.05, 5.9), min_size=64, max_size=64), st.sampled_from([3.0, 6.0, 11.0, 40.0]))
def test_the_area_drawn_is_the_area_wound(heights: list[float], gap: float) -> None:
    lines = picture(heights, Pen(blocks=True, colour=False), gap=gap)
    rows = inside(lines)
    assert len(rows) == 12
    columns = len(rows[0])
    assert columns == min(max(round(24 * gap / 6), 12), 60)
    area = sum(" ▁▂▃▄▅▆▇█".index(cell) / 8 for row in rows for cell in row) / columns / 2
    # each column is rounded to an eighth of a row
    assert area == pytest.approx(sum(heights) / 64, abs=0.5 / 16 + 1e-9)


@given(st.lists(st.floats(0, 9), min_size=1, max_size=80), st.integers(1, 100))
def test_resampling_keeps_the_mean(heights: list[float], columns: int) -> None:
    means = resampled(heights, columns)
    assert len(means) == columns
    assert sum(means) / columns == pytest.approx(sum(heights) / len(heights), abs=1e-9)
    assert max(means) <= max(heights) + 1e-9


def test_what_stands_above_the_flange_is_drawn_above_it() -> None:
    lines = picture([5.0, 6.4, 20.0])
    assert lines[1].rstrip() == " " * 22 + "#" * 8
    assert lines[2].rstrip() == " " * 14 + "#" * 16
    assert lines[3].startswith("6 mm |")
    assert len(lines) == 1 + 2 + 12 + 1


def test_colours_say_how_early_a_turn_came_and_what_is_too_high() -> None:
    lines = picture([6.6], Pen(blocks=True, colour=True))
    inks = [re.findall(r"\x1b\[38;5;(\d+)m", line) for line in lines[1:-1]]
    assert inks[:2] == [["196"], ["196"]]  # above the flange
    assert inks[2] == ["214"]
    assert inks[-1] == ["94"]
    assert [row[0] for row in inks[2:]] == sorted((row[0] for row in inks[2:]), key=int, reverse=True)
    assert all(line.count("\x1b[0m") == 1 for line in lines[1:-1])
    plain = [re.sub(r"\x1b\[[\d;]*m", "", line) for line in lines]
    assert plain == picture([6.6], Pen(blocks=True, colour=False))


class Terminal(io.StringIO):
    encoding = "utf-8"

    def isatty(self) -> bool:
        return True


def test_only_a_terminal_gets_more_than_plain_text() -> None:
    assert Pen.of(Terminal(), {"TERM": "xterm"}) == Pen(blocks=True, colour=True)
    assert Pen.of(Terminal(), {"NO_COLOR": "1"}) == Pen(blocks=True, colour=False)
    assert Pen.of(Terminal(), {"NO_COLOR": ""}) == Pen(blocks=True, colour=True)
    assert Pen.of(Terminal(), {"TERM": "dumb"}) == PLAIN
    assert Pen.of(io.StringIO(), {"TERM": "xterm"}) == PLAIN


def test_plan_draws_it_in_plain_text_into_a_pipe(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["plan", str(recipes.to_turns(tmp_path, turns=8000))]) == 0
    shown = capsys.readouterr().out
    assert "base (start)" in shown
    assert re.search(r"^8\.5 mm \|", shown, re.MULTILINE)
    assert re.search(
        r"section through a long side, where the winding stands highest: \d\.\d ± \d\.\d mm of 8\.5 mm", shown
    )
    assert "unevenness" in shown
    assert "\x1b" not in shown
    assert not set(shown) & set("▁▂▃▄▅▆▇█")
