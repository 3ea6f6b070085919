"""Copper's temperature law against two other published forms of it."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.material import copper


def test_the_constants_of_standard_annealed_copper() -> None:
    """IEC 60028, read second-hand; the density from memory."""
    assert pytest.approx(0.0172414, rel=1e-5) == copper.RESISTIVITY_20C
    assert copper.ALPHA_20C == 0.00393
    assert copper.DENSITY_G_CM3 == 8.89


def test_8000_ohm_at_26_degrees() -> None:
    """IEC 60228's correction 254.5 / (234.5 + T) gives 7815.739 ohm (computed); the laws part by 5 ppm."""
    assert copper.to_20c(8000, 26) == pytest.approx(7815.739, rel=5e-6)


@pytest.mark.parametrize("celsius", [0.0, 10.0, 19.0, 26.0, 40.0, 60.0])
def test_the_cable_standard_corrects_the_same(celsius: float) -> None:
    """IEC 60228 corrects by 254.5 / (234.5 + T), read second-hand; 1/254.5 is 0.0039293, so the laws part
    by 0.7 ppm per kelvin."""
    assert copper.to_20c(1.0, celsius) == pytest.approx(
        254.5 / (234.5 + celsius), abs=1e-6 * abs(celsius - 20)
    )


@pytest.mark.parametrize(
    ("reference", "alpha"), [(0, 0.004265), (15, 0.004009), (25, 0.003854), (30, 0.003781)]
)
def test_the_coefficient_at_other_references(reference: float, alpha: float) -> None:
    """alpha20 / (1 + alpha20 * (T - 20)), computed; tables of alpha print these."""
    rise = copper.from_20c(1.0, reference + 1.0) / copper.from_20c(1.0, reference)
    assert rise - 1 == pytest.approx(alpha, abs=5e-7)


@given(st.floats(0.1, 1e5), st.floats(-50, 150))
def test_there_and_back(ohm: float, celsius: float) -> None:
    assert copper.to_20c(copper.from_20c(ohm, celsius), celsius) == pytest.approx(ohm, rel=1e-12)


@pytest.mark.parametrize("celsius", [-235.0, 1e9, float("nan"), float("inf")])
def test_a_temperature_where_the_law_means_nothing_is_refused(celsius: float) -> None:
    with pytest.raises(ValueError, match="outside -100 to 300 degrees C"):
        copper.to_20c(1.0, celsius)
