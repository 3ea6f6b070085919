"""Values that people type."""

from __future__ import annotations

import io

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.cli import typed
from windctl.errors import UsageError


@pytest.mark.parametrize(
    ("text", "ohm"),
    [
        ("7946", 7946.0),
        ("7.946k", 7946.0),
        ("7,946k", 7946.0),
        (" 7,9 K ", 7900.0),
        (".5k", 500.0),
        ("812 ohm", 812.0),
    ],
)
def test_either_decimal_sign_and_a_k(text: str, ohm: float) -> None:
    assert typed.parse_ohm(text) == pytest.approx(ohm, rel=1e-12)


@pytest.mark.parametrize("text", ["", "k", "1.234,5", "7 946", "-5", "0", "nan", "inf", "7.9m", "1e3"])
def test_anything_else_is_refused(text: str) -> None:
    with pytest.raises(ValueError, match="resistance"):
        typed.parse_ohm(text)


@given(st.floats(0.25, 4.0), st.floats(100.0, 1e5))
def test_a_slip_of_three_places_is_noticed_and_nothing_nearer_is(ratio: float, expected: float) -> None:
    assert typed.slipped_thousand(expected * ratio, expected) is None
    assert typed.slipped_thousand(expected * ratio / 1000, expected) == pytest.approx(expected * ratio)
    assert typed.slipped_thousand(expected * ratio * 1000, expected) == pytest.approx(expected * ratio)


def test_where_nobody_can_be_asked_a_slip_is_refused_with_what_to_write() -> None:
    assert typed.confirm_ohm(7900.0, 8000.0, "a target", may_ask=False) == 7900.0
    with pytest.raises(UsageError, match="7946 ohm"):
        typed.confirm_ohm(7.946, 8000.0, "a target", may_ask=False)


def test_nobody_is_asked_with_no_input_nor_without_a_terminal(monkeypatch: pytest.MonkeyPatch) -> None:
    class Terminal(io.StringIO):
        def isatty(self) -> bool:
            return True

    monkeypatch.setattr("sys.stdin", Terminal())
    assert typed.may_ask(no_input=False)
    assert not typed.may_ask(no_input=True)
    monkeypatch.setattr("sys.stdin", io.StringIO("go\n"))
    assert not typed.may_ask(no_input=False)
