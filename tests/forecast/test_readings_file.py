"""Readings files: what is taken, what is refused and where, and that order does not matter."""

from __future__ import annotations

import math
import random
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.errors import ReadingsError
from windctl.forecast.reading import Reading
from windctl.forecast.readings_file import load_readings, parse_readings


def problems(text: str) -> list[str]:
    with pytest.raises(ReadingsError) as refused:
        parse_readings(text, "r.csv")
    return [str(problem) for problem in refused.value.problems]


def test_the_plain_form() -> None:
    lines = parse_readings("turn,ohm,celsius\n500,342.1,22.5\n1000,690,22.6\n")
    assert [line.reading for line in lines] == [
        Reading(500.0, 342.1, 22.5, resting=True),
        Reading(1000.0, 690.0, 22.6, resting=True),
    ]
    assert [line.line for line in lines] == [2, 3]


def test_every_column_in_any_order_with_comments_and_blank_lines() -> None:
    text = """# demo readings
    event ; state; seconds ; turn;ohm ;celsius; sd_ohm   # the header

    splice; turning; 12,5; 500; 0,3421k; 22,5; 0,4
    ; rest; ; 1000.5; 690.25; 22.6;   # cooled
    New  Wire;;;1500;1.1K;23;1
    """
    lines = parse_readings(text)
    assert [line.reading for line in lines] == [
        Reading(500.0, 342.1, 22.5, 0.4, resting=False, seconds=12.5),
        Reading(1000.5, 690.25, 22.6, resting=True),
        Reading(1500.0, 1100.0, 23.0, 1.0, resting=True),
    ]
    assert [line.event for line in lines] == ["splice", None, "new wire"]


@pytest.mark.parametrize("newline", ["\n", "\r\n", "\r"])
def test_line_ends_and_a_byte_order_mark(tmp_path: Path, newline: str) -> None:
    path = tmp_path / "r.csv"
    path.write_bytes("\ufeffturn,ohm,celsius\n500,342.1,22.5\n".replace("\n", newline).encode())
    assert load_readings(path)[0].reading == Reading(500.0, 342.1, 22.5, resting=True)


def test_an_open_circuit_is_a_reading() -> None:
    assert parse_readings("turn,ohm,celsius\n500,inf,22\n")[0].reading.ohm == math.inf


def test_a_header_alone_is_no_readings() -> None:
    assert parse_readings("turn,ohm,celsius\n") == []


@pytest.mark.parametrize("text", ["", "\n\n", "# nothing\n", "\ufeff"])
def test_an_empty_file_is_refused(text: str) -> None:
    (problem,) = problems(text)
    assert problem.startswith("r.csv: is empty")
    assert "turn,ohm,celsius" in problem


def test_all_problems_come_at_once_with_their_places() -> None:
    text = (
        "turn,ohm,celsius,sd_ohm,state,event\n"
        "500,342,22,,,\n"
        "x,342,22,,,\n"
        "600,nan,22,,,\n"
        "700,480,2200,,,\n"
        "800,-5,22,0,spinning,knot\n"
        "900,617\n"
        "1000,1,234,22,,,\n"
        "-1,5,22,,,\n"
    )
    assert problems(text) == [
        "r.csv:3:1: turn is 'x', not a number",
        "r.csv:4:5: ohm is 'nan', not a number",
        "r.csv:5:9: celsius is 2200 degrees C, outside -40 to 150 degrees C",
        "r.csv:6:5: ohm is -5 ohm, below 0 ohm",
        "r.csv:6:11: sd_ohm is 0 ohm; a standard deviation is above 0 ohm and finite",
        "r.csv:6:13: state is 'spinning'; it can be rest or turning",
        "r.csv:6:22: event is 'knot'; it can be splice or new wire",
        "r.csv:7:1: 2 fields, and the header has 6",
        "r.csv:8:1: 7 fields, and the header has 6; a decimal comma needs semicolons between the fields",
        "r.csv:9:1: turn is -1, outside 0 to 1000000 turns",
    ]


@pytest.mark.parametrize(
    ("header", "said"),
    [
        ("turn,ohm", "the header lacks celsius"),
        ("a,b", "there is no column 'a'"),
        ("turn,ohm,celsius,ohm", "the column ohm stands twice"),
        ("turn\tohm\tcelsius", "there is no column"),
        ("500,342.1,22.5", "the header lacks turn and ohm and celsius"),
    ],
)
def test_headers_that_are_none(header: str, said: str) -> None:
    assert any(said in problem for problem in problems(header + "\n"))


@pytest.mark.parametrize(
    "number", ["1_000", "1e999", "0x10", "٣", "1,000.5", "--1", "", "infinity?", "5 k k"]
)
def test_numbers_that_are_none(number: str) -> None:
    assert problems(f"turn,ohm,celsius\n500,{number},22\n")


def test_a_missing_file_and_a_folder_are_refused(tmp_path: Path) -> None:
    for path in (tmp_path / "none.csv", tmp_path):
        with pytest.raises(ReadingsError):
            load_readings(path)


ROWS = [
    "500,342.1,22.5,,splice",
    "500,342.3,22.5,,",
    "500,342.1,22.4,,",
    "500,342.1,22.5,7,",
    "500,342.1,22.5,,",
    "500,342.1,22.5,,new wire",
    "20,13.1,22,,",
]


@given(st.randoms(use_true_random=False))
def test_any_order_of_lines_is_the_same_readings(rng: random.Random) -> None:
    shuffled = list(ROWS)
    rng.shuffle(shuffled)
    header = "turn,ohm,celsius,seconds,event\n"
    one = parse_readings(header + "\n".join(ROWS))
    other = parse_readings(header + "\n".join(shuffled))
    assert [(a.reading, a.event) for a in one] == [(b.reading, b.event) for b in other]
    assert [line.event for line in one][-2:] == ["new wire", "splice"]


@given(st.text(max_size=200))
def test_any_text_is_readings_or_readings_errors(text: str) -> None:
    try:
        lines = parse_readings(text)
    except ReadingsError as refused:
        assert refused.problems
    else:
        assert all(math.isfinite(line.reading.turn) for line in lines)


NUMBERS = st.tuples(
    st.floats(0, 1e5), st.floats(0, 1e6), st.floats(-40, 150), st.none() | st.floats(1e-9, 1e6), st.booleans()
)


@given(st.lists(NUMBERS, max_size=8), st.sampled_from([(",", "."), (";", ","), (";", ".")]))
def test_what_is_written_is_read(
    rows: list[tuple[float, float, float, float | None, bool]], form: tuple[str, str]
) -> None:
    separator, sign = form
    text = separator.join(("turn", "ohm", "celsius", "sd_ohm", "state")) + "\n"
    for turn, ohm, celsius, sd, resting in rows:
        fields = [repr(turn), repr(ohm), repr(celsius), "" if sd is None else repr(sd)]
        fields = [field.replace(".", sign) for field in fields] + ["rest" if resting else "turning"]
        text += separator.join(fields) + "\n"
    found = [line.reading for line in parse_readings(text)]
    wanted = [Reading(turn, ohm, celsius, sd, resting=resting) for turn, ohm, celsius, sd, resting in rows]
    assert sorted(map(repr, found)) == sorted(map(repr, wanted))
