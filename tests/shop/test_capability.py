"""Capability indices and their intervals against published values, tables, scipy and drawn lots."""

from __future__ import annotations

import numpy as np
import pytest
import scipy.stats

from windctl.shop.capability import capability
from windctl.shop.chi_square import beyond, quantile


@pytest.mark.parametrize(
    ("below", "freedom", "value"),
    [(0.975, 10, 20.483), (0.025, 10, 3.247), (0.95, 1, 3.841), (0.025, 19, 8.907)],
)
def test_quantiles_are_those_of_the_table(below: float, freedom: int, value: float) -> None:
    """NIST/SEMATECH e-Handbook 1.3.6.7.4, critical values of the chi-square distribution (from memory)."""
    assert quantile(below, freedom) == pytest.approx(value, abs=1e-3)
    assert beyond(value, freedom) == pytest.approx(1.0 - below, abs=1e-4)


def test_a_published_interval_of_cp() -> None:
    """Montgomery, Introduction to Statistical Quality Control, the example with limits 38 and 62, n = 20 and
    s = 1.75: Cp 2.29, from 1.57 to 3.01 (from memory; its last digit follows from a rounded 2.29)."""
    z = np.array([scipy.stats.norm.ppf((i + 0.5) / 20) for i in range(20)])
    values = 50.0 + 1.75 * (z - z.mean()) / z.std(ddof=1)
    index = capability(values.tolist(), 38.0, 62.0).cp
    assert index is not None
    assert (index.value, index.low, index.high) == pytest.approx((2.29, 1.57, 3.01), abs=0.0101)


@pytest.mark.parametrize("centre", [0.0, 1.5, 4.0])
def test_intervals_hold_as_often_as_they_say(centre: float) -> None:
    """2500 drawn lots of 15: 95 % hold; four sampling sd are 1.7 %, and Cpk's is an approximation by 2 %."""
    rng = np.random.default_rng(5)
    true_cp, true_cpk = 4.0 / 3.0, (4.0 - centre) / 3.0
    cp_holds = cpk_holds = 0
    for lot in rng.normal(centre, 1.0, size=(2500, 15)).tolist():
        found = capability(lot, -4.0, 4.0)
        assert found.cp is not None
        cp_holds += found.cp.low < true_cp < found.cp.high
        cpk_holds += found.cpk.low < true_cpk < found.cpk.high
    assert cp_holds / 2500 == pytest.approx(0.95, abs=0.018)
    assert cpk_holds / 2500 == pytest.approx(0.95, abs=0.034)


def test_one_limit_and_no_limit() -> None:
    found = capability([1.0, 2.0, 3.0], None, 5.0)
    assert found.cp is None
    assert found.cpk.value == pytest.approx(1.0)  # (5 - 2)/(3 * 1)
    for values, low, high, words in (
        ([1.0], 0.0, 2.0, "two or more"),
        ([1.0, 2.0], None, None, "no limit"),
        ([1.0, 2.0], 3.0, 1.0, "cross"),
        ([1.0, 1.0], 0.0, 2.0, "alike"),
    ):
        with pytest.raises(ValueError, match=words):
            capability(values, low, high)
