"""Decimal numbers become integers exactly as they were typed."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.lay.fixed import exact, nearest, sub_steps, whole_steps


@given(st.integers(-(10**14), 10**14), st.integers(0, 20))
def test_what_was_typed_is_what_counts(digits: int, places: int) -> None:
    typed = Fraction(digits, 10**places)
    assert exact(float(f"{digits}e-{places}")) == typed


def test_a_tenth_is_a_tenth() -> None:
    assert exact(0.1) == Fraction(1, 10)
    assert exact(1e-05) == Fraction(1, 100_000)
    assert exact(3) == 3


@pytest.mark.parametrize("value", [float("nan"), float("inf")])
def test_what_is_no_number_is_refused(value: float) -> None:
    with pytest.raises(ValueError, match="Invalid literal"):
        exact(value)


def test_halves_go_to_even() -> None:
    assert [nearest(Fraction(n, 2)) for n in (-3, -1, 1, 3, 5)] == [-2, 0, 0, 2, 2]
    assert whole_steps(exact(0.0125), exact(200.0)) == 2
    assert sub_steps(exact(0.08), exact(200.0)) == 16 * 65536
