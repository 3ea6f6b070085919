"""Calibrations into the text of a profile; the standard library's parser is the judge."""

from __future__ import annotations

import tomllib
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.checkup.keep import with_calibration

PROFILE = """\
# the bench by the window
format = 1
name = "north"   # its name

[guide]            # bought used
kind = "step"
backlash_mm = 0.05 # by dial gauge
steps_per_mm = 200

[readings]
mode = "live"
"""


def test_a_value_is_replaced_where_it_stands_and_comments_stay() -> None:
    kept = with_calibration(PROFILE, {"guide.backlash_mm": 0.081, "readings.lead_ohm": 0.42})
    assert kept == PROFILE.replace("0.05 #", "0.081 #").replace(
        "[readings]\n", "[readings]\nlead_ohm = 0.42\n"
    )


def test_a_missing_table_comes_at_the_end() -> None:
    kept = with_calibration("format = 1", {"guide.backlash_mm": 0.1})
    assert kept == "format = 1\n\n[guide]\nbacklash_mm = 0.1\n"


def test_dotted_keys_get_one_more() -> None:
    kept = with_calibration("guide.kind = 'step'\n", {"guide.backlash_mm": 0.1})
    assert tomllib.loads(kept) == {"guide": {"kind": "step", "backlash_mm": 0.1}}


def test_an_inline_table_without_the_key_is_left_to_the_person() -> None:
    with pytest.raises(ValueError, match=r"guide\.backlash_mm = 0\.1"):
        with_calibration("guide = {kind = 'step'}\n", {"guide.backlash_mm": 0.1})
    kept = with_calibration("guide = {backlash_mm = 3}\n", {"guide.backlash_mm": 0.1})
    assert tomllib.loads(kept) == {"guide": {"backlash_mm": 0.1}}


def test_what_is_no_number_is_left_to_the_person() -> None:
    with pytest.raises(ValueError, match="by hand"):
        with_calibration(PROFILE, {"guide.kind": 1})


NAMES = st.sampled_from(["guide", "readings", "spindle"])
KEYS = st.sampled_from(["backlash_mm", "lead_ohm", "counts_per_turn"])
VALUES = st.one_of(st.integers(0, 400), st.floats(0, 1e4, allow_nan=False))


@given(st.dictionaries(NAMES, st.dictionaries(KEYS, VALUES)), NAMES, KEYS, st.floats(0, 1e4, allow_nan=False))
def test_only_the_one_value_changes(tables: dict[str, Any], name: str, key: str, value: float) -> None:
    text = "format = 1 # one\n" + "".join(
        f"\n[{table}] # of {table}\n" + "".join(f"{one} = {what} # {one}\n" for one, what in pairs.items())
        for table, pairs in tables.items()
    )
    wanted = tomllib.loads(text)
    wanted.setdefault(name, {})[key] = value
    kept = with_calibration(text, {f"{name}.{key}": value})
    assert tomllib.loads(kept) == wanted
    assert kept.count("#") == text.count("#")
