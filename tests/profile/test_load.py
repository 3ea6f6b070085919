"""Files that are profiles and files that are not."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.errors import ProfileError
from windctl.forms.source import text_of
from windctl.profile.load import load_profile, parse_profile
from windctl.profile.model import MachineProfile

BENCH_ONE = """\
# A bench of an invented shop: counts and index from an encoder, the wire guided by hand.
format = 1
name = "Bench by the window (demo)"
bench = "b1"
port.url = "socket://localhost:4000"
[spindle]
drive = "step"
counts_per_turn = 400
steps_per_turn = 400
index = true
max_rpm = 1200
[tension]
kind = "felt"
[readings]
mode = "checks"
lead_ohm = 0.4
"""


def test_a_file_is_loaded(tmp_path: Path) -> None:
    file = tmp_path / "bench.toml"
    file.write_text(BENCH_ONE)
    profile = load_profile(file)
    assert (profile.bench, profile.port.url, profile.port.baud) == ("b1", "socket://localhost:4000", 115200)
    assert profile.readings.mode == "checks"
    assert profile.guide.kind == "hand"


@pytest.mark.parametrize("content", [b"", b"\xef\xbb\xbfformat = 1", b"format = 1\x00", b"\xc3", b"format"])
def test_what_is_no_profile_is_an_error_that_names_the_file(tmp_path: Path, content: bytes) -> None:
    file = tmp_path / "bad.toml"
    file.write_bytes(content)
    with pytest.raises(ProfileError, match=re.escape(str(file))):
        load_profile(file)


def test_no_file(tmp_path: Path) -> None:
    with pytest.raises(ProfileError, match="there is no such file"):
        load_profile(tmp_path / "absent.toml")


_VALUES = st.one_of(
    st.integers().map(str),
    st.floats().map(repr),
    st.sampled_from(["true", '"step"', '"none"', "[1]", "{}", '""']),
)


@given(st.dictionaries(st.integers(0, BENCH_ONE.count("\n") - 1), _VALUES, max_size=3), st.binary(max_size=4))
def test_anything_gives_a_profile_or_the_error(changes: dict[int, str], tail: bytes) -> None:
    lines = BENCH_ONE.splitlines()
    for number, value in changes.items():
        key, equals, _ = lines[number].partition(" = ")
        lines[number] = f"{key} = {value}" if equals else lines[number]
    content = "\n".join(lines).encode() + tail
    try:
        assert isinstance(parse_profile(text_of(content, "x", ProfileError), "x"), MachineProfile)
    except ProfileError as error:
        assert error.problems
