"""Every problem of a text at once, each at its place and in a winder's words."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Literal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.forms.toml_documents import documents
from windctl.errors import FileInvalid
from windctl.forms.faults import Fault, dotted
from windctl.forms.form import Form, FormatOne, Line, Lines, about, check, quantity
from windctl.forms.toml_form import load_form


class FaultyForm(FileInvalid):
    """The error asked for in these tests."""


class Gap(Form):
    width_mm: Annotated[float, quantity("mm", "width of the gap", gt=0, lt=50)]
    turns: Annotated[int | None, quantity("turns", "how many", ge=1, le=9)] = None
    style: Annotated[Literal["even", "scatter"], about("the style")] = "even"
    guided: Annotated[bool, about("whether a motor guides")] = False

    @check
    def _turns_fit(self) -> Iterator[Fault]:
        if self.turns is not None and self.turns > self.width_mm:
            yield Fault(("turns",), f"is {self.turns} turns, more than fit into {self.width_mm:g} mm")

    @check
    def _scatter_needs_turns(self) -> Iterator[Fault]:
        if self.style == "scatter" and self.turns is None:
            yield Fault(("turns",), "is missing in a scatter", missing=True)


class Sample(Form):
    format: FormatOne
    name: Annotated[Line, about("the name")]
    notes: Annotated[Lines | None, about("the notes")] = None
    gap: Gap
    other: Gap | None = None

    @check
    def _other_is_wider(self) -> Iterator[Fault]:
        if self.other is not None and self.other.width_mm <= self.gap.width_mm:
            yield Fault(("other", "width_mm"), f"is {self.other.width_mm:g} mm, not more than the gap")


def problems(text: str) -> list[str]:
    with pytest.raises(FaultyForm) as caught:
        load_form(text, "x.toml", Sample, FaultyForm)
    assert len(caught.value.problems) == len(str(caught.value).split("\n"))
    return str(caught.value).split("\n")


def test_a_good_text_gives_the_form() -> None:
    form = load_form('format = 1\nname = "n"\ngap.width_mm = 3\n', "x.toml", Sample, FaultyForm)
    assert form == Sample(format=1, name="n", gap=Gap(width_mm=3.0))
    assert isinstance(form.gap.width_mm, float)


HEAD = 'format = 1\nname = "n"\n[gap]\n'


@pytest.mark.parametrize(
    ("line", "said"),
    [
        ("width_mm = 0", "4:12: gap.width_mm is 0 mm, must be more than 0 mm"),
        ("width_mm = -0.5", "4:12: gap.width_mm is -0.5 mm, must be more than 0 mm"),
        ("width_mm = 50.0", "4:12: gap.width_mm is 50 mm, must be less than 50 mm"),
        ("width_mm = nan", "4:12: gap.width_mm is nan, which is not a finite number"),
        ("width_mm = -inf", "4:12: gap.width_mm is -inf, which is not a finite number"),
        ("width_mm = true", "4:12: gap.width_mm is true, where a number in mm is needed"),
        (
            'width_mm = "3"',
            '4:12: gap.width_mm is "3", where a number in mm is needed; write it without quotes',
        ),
        ("width_mm = [3]", "4:12: gap.width_mm is an array, where a number in mm is needed"),
        ("width_mm = {a = 3}", "4:12: gap.width_mm is a table, where a number in mm is needed"),
        (
            "width_mm = 1979-05-27",
            "4:12: gap.width_mm is the date or time 1979-05-27, where a number in mm is needed",
        ),
        (
            f"width_mm = 1{'0' * 400}",
            "4:12: gap.width_mm is a number of more than 18 digits, where a number in mm is needed",
        ),
        ("width_mm = 9\nturns = 0", "5:9: gap.turns is 0 turns, must be at least 1 turns"),
        ("width_mm = 9\nturns = 10", "5:9: gap.turns is 10 turns, must be at most 9 turns"),
        ("width_mm = 9\nturns = 3.0", "5:9: gap.turns is 3.0, where a whole number of turns is needed"),
        ("width_mm = 9\nturns = false", "5:9: gap.turns is false, where a whole number of turns is needed"),
        ("width_mm = 9\nguided = 1", "5:10: gap.guided is 1, where true or false is needed"),
        (
            'width_mm = 9\nstyle = "scater"',
            '5:9: gap.style is "scater", must be "even" or "scatter"; did you mean "scatter"?',
        ),
        ("width_mm = 9\nstyle = 3", '5:9: gap.style is 3, must be "even" or "scatter"'),
        ("width_mm = 4\nturns = 5", "5:9: gap.turns is 5 turns, more than fit into 4 mm"),
        ('width_mm = 4\nstyle = "scatter"', "3:2: gap.turns is missing in a scatter"),
        (
            "width_mm = 4\n[other]\nwidth_mm = 3",
            "6:12: other.width_mm is 3 mm, not more than the gap",
        ),
    ],
)
def test_a_problem_names_place_value_limit_and_unit(line: str, said: str) -> None:
    assert problems(HEAD + line + "\n") == [f"x.toml:{said}"]


def test_the_version_of_the_form_is_one_and_only_a_whole_number() -> None:
    rest = 'name = "n"\ngap = {width_mm = 3}\n'
    assert problems("format = 2\n" + rest) == ["x.toml:1:10: format is 2, must be 1"]
    assert problems("format = true\n" + rest) == [
        "x.toml:1:10: format is true, where a whole number is needed"
    ]
    assert problems("format = 1.0\n" + rest) == ["x.toml:1:10: format is 1.0, where a whole number is needed"]


def test_missing_keys_are_placed_at_their_table() -> None:
    assert problems("\n[other]\n") == [
        "x.toml:1:1: format is missing: version of this form; 1 is the only one so far",
        "x.toml:1:1: gap is missing; the table [gap] is needed",
        "x.toml:1:1: name is missing: the name",
        "x.toml:2:2: other.width_mm is missing: width of the gap [mm]",
    ]


def test_unknown_keys_are_placed_at_the_key_with_a_suggestion() -> None:
    text = HEAD + "width_mm = 3\nwidht_mm = 3\nzzz = 1\nnotes = 'x'\n[gapp]\nwidth_mm = 3\n"
    assert problems(text) == [
        "x.toml:5:1: gap.widht_mm is not a key of [gap]; did you mean width_mm?",
        "x.toml:6:1: gap.zzz is not a key of [gap]; known are width_mm, turns, style, guided",
        "x.toml:7:1: gap.notes is not a key of [gap]; it belongs at notes",
        "x.toml:8:2: gapp is not a key or table of this form; did you mean gap?",
    ]


def test_a_key_of_another_table_is_sent_there() -> None:
    assert problems(HEAD + "width_mm = 3\n" + "[other]\nwidth_mm = 4\nname = 'x'\n") == [
        "x.toml:7:1: other.name is not a key of [other]; it belongs at name"
    ]


def test_a_value_where_a_table_belongs() -> None:
    assert problems('format = 1\nname = "n"\ngap = 3\n') == ["x.toml:3:7: gap is 3, where a table is needed"]


def test_all_problems_come_at_once_also_those_between_keys_and_tables() -> None:
    text = (
        'format = 7\nname = ""\n[gap]\nwidth_mm = 4\nturns = 5\nstyle = "x"\nextra = 1\n'
        "[other]\nwidth_mm = 4\nguided = 0\n"
    )
    assert problems(text) == [
        "x.toml:1:10: format is 7, must be 1",
        "x.toml:2:8: name is empty",
        "x.toml:5:9: gap.turns is 5 turns, more than fit into 4 mm",
        'x.toml:6:9: gap.style is "x", must be "even" or "scatter"',
        "x.toml:7:1: gap.extra is not a key of [gap]; known are width_mm, turns, style, guided",
        "x.toml:9:12: other.width_mm is 4 mm, not more than the gap",
        "x.toml:10:10: other.guided is 0, where true or false is needed",
    ]


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("", ": is empty"),
        (" \n\t\n", ": is empty"),
        ("\ufeffformat = 1\n", ":1:1: begins with a byte order mark; save it as plain UTF-8 without one"),
        ("format = 1\nname = \n", ":2:8: is not valid TOML: Invalid value"),
        ("format = 1\nformat = 2\n", ":2:11: is not valid TOML: Cannot overwrite a value"),
        ("gap = [1,\n2", ":2:2: is not valid TOML: Unclosed array"),
        ("a = \x1b[31m\n", ":1:5: is not valid TOML: Invalid value"),
        ("x = 1" + "1" * 5000, ":1:5: is a number with far too many digits"),
        ("x = " + "[" * 50_000, ": has tables or arrays nested too deeply"),
        ("x = 1\na" + ".a" * 30_000 + " = 1", ":2:1: is a key of more than 40 parts"),
        ("[a" + " . 'b'" * 41 + "]", ":1:1: is a key of more than 40 parts"),
        ("x = {" + '"a".' * 41 + "b = 1}", ":1:5: is a key of more than 40 parts"),
        ("x = '\ud800'", ":1:6: is not a character of UTF-8 text"),
    ],
)
def test_what_is_no_toml_is_one_problem(text: str, said: str) -> None:
    assert problems(text) == [f"x.toml{said}"]


def test_text_for_screens_may_not_steer_them() -> None:
    text = 'format = 1\nname = "a\\u001b[31m"\nnotes = "fine\\n\\tfine \\u0007"\n[gap]\nwidth_mm = 3\n'
    assert problems(text) == [
        "x.toml:2:8: name holds the unprintable character \\x1b",
        "x.toml:3:9: notes holds the unprintable character \\x07",
    ]
    assert problems('"\\u001b[2J" = 1\n' + HEAD + "width_mm = 1\n")[0].startswith(
        'x.toml:1:1: "\\x1b[2J" is not'
    )


def test_a_text_that_is_too_long_says_how_long() -> None:
    said = problems(f'format = 1\nname = "{"n" * 81}"\ngap.width_mm = 3\n')
    assert said == ["x.toml:2:8: name has 81 characters, at most 80 are allowed"]


def test_paths_are_written_as_in_toml() -> None:
    assert dotted(("lay", "pitch_mm")) == "lay.pitch_mm"
    assert dotted(("a", 0, "b c")) == 'a[1]."b c"'


@given(documents() | st.text())
def test_any_text_gives_the_form_or_the_error(text: str) -> None:
    try:
        assert isinstance(load_form(text, "x.toml", Sample, FaultyForm), Sample)
    except FaultyForm as error:
        assert error.problems


@given(st.binary(max_size=200))
def test_a_good_text_with_anything_behind_it_gives_the_form_or_the_error(tail: bytes) -> None:
    text = HEAD + "width_mm = 3\n" + tail.decode("utf-8", errors="replace")
    try:
        assert load_form(text, "x.toml", Sample, FaultyForm).gap.width_mm == 3
    except FaultyForm as error:
        assert all(problem.line == 0 or problem.line >= 1 for problem in error.problems)
