"""The interval against the tolerance."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.forecast.verdict import verdict


@pytest.mark.parametrize(
    ("low", "high", "said"),
    [
        (5950.0, 6050.0, "within"),
        (5940.0, 6060.0, "within"),  # the limits themselves belong to it
        (5939.9, 6000.0, "not judged"),
        (5900.0, 6100.0, "not judged"),  # wider than the tolerance: nothing can be said
        (6060.1, 6100.0, "outside"),
        (5800.0, 5939.9, "outside"),
        (6060.0, 6100.0, "not judged"),
    ],
)
def test_verdicts_at_one_per_cent_of_6000(low: float, high: float, said: str) -> None:
    assert verdict(low, high, 6000.0, 1.0) == said


@given(st.floats(5000, 7000), st.floats(0, 500), st.floats(0.1, 5))
def test_a_sharper_interval_never_turns_a_verdict_round(mid: float, half: float, tolerance: float) -> None:
    wide = verdict(mid - half, mid + half, 6000.0, tolerance)
    sharp = verdict(mid - half / 2, mid + half / 2, 6000.0, tolerance)
    assert wide == sharp or wide == "not judged"
