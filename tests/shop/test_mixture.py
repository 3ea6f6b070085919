"""Mixtures of normals, against the standard library's normal distribution and drawn samples."""

from __future__ import annotations

from math import log
from statistics import NormalDist

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.shop.mixture import Part, interval_of_log, quantile


@given(mean=st.floats(-10.0, 10.0), sd=st.floats(1e-3, 3.0), p=st.floats(0.01, 0.99))
def test_one_part_is_a_normal(mean: float, sd: float, p: float) -> None:
    assert quantile([Part(1.0, mean, sd)], p) == pytest.approx(NormalDist(mean, sd).inv_cdf(p), abs=1e-6)


def test_two_parts_are_a_sample_of_both() -> None:
    parts = [Part(0.3, 0.0, 0.1), Part(0.7, 1.0, 0.2)]
    rng = np.random.default_rng(1)
    which = rng.random(400_000) < 0.3
    drawn = np.where(which, rng.normal(0.0, 0.1, 400_000), rng.normal(1.0, 0.2, 400_000))
    for p in (0.025, 0.2, 0.5, 0.975):
        assert quantile(parts, p) == pytest.approx(np.quantile(drawn, p), abs=0.01)


def test_the_interval_of_a_logarithm() -> None:
    interval = interval_of_log([Part(1.0, log(8000.0), 0.01)])
    assert interval.value == pytest.approx(8000.0)
    assert interval.high / interval.value == pytest.approx(interval.value / interval.low)
    assert interval.high == pytest.approx(8000.0 * 1.0197905, rel=1e-5)  # e^0.0195996
