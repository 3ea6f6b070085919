"""How numbers are written for people."""

from __future__ import annotations

import errno
import io
import json
import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl import numbers
from windctl.cli import present


@pytest.mark.parametrize(
    ("value", "half_width", "text"),
    [
        (7945.62, 30.9, "7.946 ± 0.031 kohm"),
        (7945.62, 3.14, "7.9456 ± 0.0031 kohm"),
        (812.44, 3.06, "812.4 ± 3.1 ohm"),
        (812.44, 26.0, "812 ± 26 ohm"),
        (7945.62, 0.0, "7.946 kohm"),
        (812.44, 0.0, "812.4 ohm"),
        (5.4716, 0.0, "5.5 ohm"),
    ],
)
def test_a_resistance_shows_as_many_digits_as_its_uncertainty_carries(
    value: float, half_width: float, text: str
) -> None:
    assert present.ohm(value, half_width) == text


@given(st.floats(1.0, 1e6), st.floats(1e-3, 1e5))
def test_what_is_written_is_within_a_twentieth_of_the_half_width(value: float, half_width: float) -> None:
    """Two significant digits of the uncertainty: rounding the value costs at most 1/20 of it."""
    text = present.ohm(value, half_width)
    scale = 1000.0 if text.endswith("kohm") else 1.0
    written = float(text.split(" ± ")[0].replace(" ", "")) * scale
    assert abs(written - value) <= half_width / 20 * 1.000001 + 1e-9


def test_thousands_are_parted_by_a_space() -> None:
    assert present.grouped(7946.0) == "7 946"
    assert present.grouped(1234567.891, 2) == "1 234 567.89"
    assert present.grouped(-0.04, 1) == "0.0"
    assert [numbers.at_turn(n) for n in (1200.0, 1199.98, 1414.51)] == ["1 200", "1 200", "1 414.5"]
    assert present.grouped(-12.04, 1) == "-12.0"


def test_turns_and_durations() -> None:
    assert present.turns(7946.0) == "7 946 turns"
    assert present.turns(7946.25) == "7 946.25 turns"
    assert present.turns(7946.0, 206.0) == "7 946 ± 206 turns"
    assert [present.duration(s) for s in (0.4, 45, 485, 3730)] == ["0:00", "0:45", "8:05", "1:02:10"]


def test_json_is_one_object_with_its_format_and_refuses_what_json_cannot_say(
    capsys: pytest.CaptureFixture[str],
) -> None:
    present.result_json({"turns": 3})
    assert capsys.readouterr().out == '{\n  "format": 1,\n  "turns": 3\n}\n'
    with pytest.raises(ValueError, match="JSON"):
        present.result_json({"ohm": math.nan})


@pytest.mark.parametrize("n", [0, 1, 2, 1203])
def test_a_long_list_is_one_json_object_too(capsys: pytest.CaptureFixture[str], n: int) -> None:
    rows = [{"coil": f"b1-2026-{k:04d}", "recipe": "größer", "turns": None} for k in range(n)]
    present.result_json_rows("coils", iter(rows))
    text = capsys.readouterr().out
    assert json.loads(text) == {"format": 1, "coils": rows}
    assert text.count("\n") == n + 2
    with pytest.raises(ValueError, match="not JSON compliant"):
        present.result_json_rows("coils", [{"ohm": math.nan}])


@pytest.mark.parametrize("n", [0, 1, 1203])
def test_columns_of_a_table_stand_under_each_other(capsys: pytest.CaptureFixture[str], n: int) -> None:
    rows = [["b" * (1 + k % 3), str(10**k) if k < 5 else "", "within"] for k in range(n)]
    present.table(["coil", "turns", "verdict"], rows, right=" r")
    written = capsys.readouterr().out.splitlines()
    assert len(written) == n + 1
    wide = 5
    assert all(line[:4].rstrip() == row[0] for line, row in zip(written[1:], rows, strict=True))
    assert all(line[6 : 6 + wide].strip() == row[1] for line, row in zip(written[1:], rows, strict=True))
    assert all(line[6 + wide :] == "  within" for line in written[1:])


def test_signs_are_spelt_out_where_the_stream_lacks_them() -> None:
    ascii_stream = io.TextIOWrapper(io.BytesIO(), encoding="ascii")
    assert present.writable("7.946 ± 0.031 kohm at 20 °C", ascii_stream) == "7.946 +- 0.031 kohm at 20 deg C"
    utf8_stream = io.TextIOWrapper(io.BytesIO(), encoding="UTF-8")
    assert present.writable("±", utf8_stream) == "±"


class Gone(io.StringIO):
    """A stream whose far end has gone."""

    encoding = "utf-8"

    def __init__(self, code: int) -> None:
        super().__init__()
        self.code = code

    def write(self, text: str) -> int:
        raise OSError(self.code, "gone")


@pytest.mark.parametrize("code", [errno.EIO, errno.EPIPE])
def test_a_message_that_nobody_can_read_any_more_is_passed_over(
    code: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("sys.stderr", Gone(code))
    present.message("the spindle stands")


def test_a_result_without_a_reader_is_told_and_one_without_a_terminal_is_not(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr("sys.stdout", Gone(errno.EIO))
    present.result("150 turns")
    present.result_json({"turns": 150})
    monkeypatch.setattr("sys.stdout", Gone(errno.EPIPE))
    with pytest.raises(BrokenPipeError):
        present.result("150 turns")
    monkeypatch.setattr("sys.stdout", Gone(errno.ENOSPC))
    with pytest.raises(OSError, match="gone"):
        present.result("150 turns")


def test_a_long_line_is_parted_between_words_and_a_command_is_not() -> None:
    assert present.folded("one two three", None) == "one two three"
    assert present.folded("one two three", 8) == "one two\nthree"
    assert present.folded("name  one two three", 13, under=6) == "name  one two\n      three"
    assert present.folded("0123456789abcdef", 8) == "0123456789abcdef"  # a digest
    line = "The spindle stands, the coil stays open: windctl resume v1-2026-0001"
    assert present.folded(line, 30) == line
    assert present.folded("a\nlong line", 5) == "a\nlong\nline"
    drawing = "start o---.      .---o end"
    assert present.folded(drawing, 12) == drawing


WIDE = [("coil", "recipe", "at 20 °C"), ("b1-2026-0001", "Bridge, by hand", "5.900 ± 0.050 kohm")]


@pytest.mark.parametrize("width", range(36, 60))
def test_columns_follow_the_terminal_and_figures_stay_whole(width: int) -> None:
    """12, 15 and 18 cells; the longest word of the recipes' column has 7."""
    lines = present.in_columns(WIDE, [False, False, True], width)
    assert max(map(len, lines)) <= width or width < 12 + 7 + 18 + 2
    assert "5.900 ± 0.050 kohm" in lines[1]
    words = " ".join(lines).split()
    assert sorted(words) == sorted(" ".join(" ".join(row) for row in WIDE).split())


def test_columns_that_cannot_be_narrow_enough_are_left_to_the_terminal() -> None:
    assert present.in_columns(WIDE, [False, False, True], 30) == present.in_columns(
        WIDE, [False, False, True]
    )
