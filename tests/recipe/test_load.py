"""Files that are recipes and files that are not."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.recipe.samples import GOOD
from windctl.errors import RecipeError
from windctl.forms.source import text_of
from windctl.recipe.load import load_recipe, parse_recipe
from windctl.recipe.model import Recipe


def test_a_file_is_loaded(tmp_path: Path) -> None:
    file = tmp_path / "good.toml"
    file.write_text(GOOD)
    assert load_recipe(file) == parse_recipe(GOOD)


def test_windows_line_ends_change_nothing(tmp_path: Path) -> None:
    file = tmp_path / "good.toml"
    file.write_bytes(GOOD.replace("\n", "\r\n").encode())
    assert load_recipe(file).digest == parse_recipe(GOOD).digest


@pytest.mark.parametrize(
    "content",
    [
        b"",
        b"\n",
        b"\xef\xbb\xbf" + GOOD.encode(),
        GOOD.encode("utf-16"),
        b"\x7fELF\x00\x01",
        b"\xff\xfe",
        b"[",
        b"a",
    ],
)
def test_what_is_no_recipe_is_an_error_that_names_the_file(tmp_path: Path, content: bytes) -> None:
    file = tmp_path / "bad.toml"
    file.write_bytes(content)
    with pytest.raises(RecipeError, match=re.escape(str(file))):
        load_recipe(file)


def test_no_file_and_a_folder(tmp_path: Path) -> None:
    with pytest.raises(RecipeError, match="there is no such file"):
        load_recipe(tmp_path / "absent.toml")
    with pytest.raises(RecipeError, match="is a folder, not a file"):
        load_recipe(tmp_path)


def _recipe_or_error(content: bytes) -> None:
    try:
        assert isinstance(parse_recipe(text_of(content, "x", RecipeError), "x"), Recipe)
    except RecipeError as error:
        assert error.problems
        for problem in error.problems:
            assert problem.text
            assert problem.line >= 0
            assert str(problem).isprintable()


@given(st.binary())
def test_any_bytes_give_a_recipe_or_the_error(content: bytes) -> None:
    _recipe_or_error(content)


@given(st.data())
def test_a_recipe_with_bytes_cut_out_or_put_in_gives_a_recipe_or_the_error(data: st.DataObject) -> None:
    content = GOOD.encode()
    start = data.draw(st.integers(0, len(content)))
    end = data.draw(st.integers(start, min(start + 30, len(content))))
    put_in = data.draw(
        st.binary(max_size=6) | st.sampled_from([b"\n", b"=", b"[", b'"', b"#", b"9", b"{}", b"-"])
    )
    _recipe_or_error(content[:start] + put_in + content[end:])


_ODD_VALUES = st.one_of(
    st.integers().map(str),
    st.floats().map(lambda number: repr(number)),
    st.sampled_from(
        ['""', '"AWG 42"', '"AWG 1"', '"AWG 56"', '"grade 2"', '"even"', "true", "[]", "{}", "{a = 1}"]
    ),
    st.sampled_from(
        ["0", "0.0", "-0.0", "1e308", "5e-324", "07:32:00", "1" * 400, '"\\u0000"', "[[1], {b = []}]"]
    ),
)


@given(st.dictionaries(st.integers(0, GOOD.count("\n") - 1), _ODD_VALUES, min_size=1, max_size=4))
def test_a_recipe_with_other_values_gives_a_recipe_or_the_error(changes: dict[int, str]) -> None:
    """Also with absurd sizes: what passes must let every derived figure be worked out."""
    lines = GOOD.splitlines()
    for number, value in changes.items():
        key, equals, _ = lines[number].partition(" = ")
        lines[number] = f"{key} = {value}" if equals else lines[number]
    try:
        recipe = parse_recipe("\n".join(lines), "x")
    except RecipeError as error:
        assert error.problems
        return
    assert recipe.pitch_mm > 0
    assert recipe.stroke_mm > 0
    assert recipe.program_turns > 0
    assert recipe.wire_data().ohm_per_m > 0
    assert recipe.orientation.spindle in ("cw", "ccw")
    assert len(recipe.digest) == 64
