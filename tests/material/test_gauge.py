"""Sizes of wire against the gauge's definition, an independent table, and the metric standard's own laws."""

from __future__ import annotations

import math

import pytest
from fluids.piping import t_from_gauge

from windctl.material.gauge import (
    METRIC,
    MetricSize,
    awg_diameter_mm,
    awg_number,
    metric_ohm_per_m,
    ohm_per_m_of,
    tolerance_rel,
)


def test_the_definition_of_the_gauge() -> None:
    """ASTM B258, NBS Handbook 100, read second-hand: no. 36 is 5 mil, neighbours' ratio 1.1229322."""
    assert awg_diameter_mm(36) == pytest.approx(0.127, rel=1e-12)
    assert awg_diameter_mm(1) == pytest.approx(0.2893 * 25.4, rel=2e-4)  # no. 1 as printed, from memory
    assert awg_diameter_mm(41) / awg_diameter_mm(42) == pytest.approx(1.1229322, rel=1e-7)


@pytest.mark.parametrize(
    ("number", "bare_mm", "ohm_per_m"),
    [
        (38, 0.10072, 2.1642),
        (40, 0.07987, 3.4411),
        (41, 0.07113, 4.3392),
        (42, 0.06334, 5.4716),
        (43, 0.05641, 6.8996),
        (44, 0.05023, 8.7002),
    ],
)
def test_fine_sizes(number: int, bare_mm: float, ohm_per_m: float) -> None:
    """Computed from the law of ASTM B258 and 1/58 ohm mm2/m of IEC 60028."""
    assert awg_diameter_mm(number) == pytest.approx(bare_mm, abs=5e-6)
    assert ohm_per_m_of(awg_diameter_mm(number)) == pytest.approx(ohm_per_m, abs=5e-5)


@pytest.mark.parametrize("number", range(36, 46))
def test_a_table_from_elsewhere_agrees(number: int) -> None:
    """The general library `fluids` carries a gauge table rounded to 0.01 mil in the fine sizes."""
    table_mm = t_from_gauge(number, SI=True, schedule="AWG") * 1000
    assert awg_diameter_mm(number) ** 2 == pytest.approx(table_mm**2, rel=0.0035)


@pytest.mark.parametrize(
    "name", ["AWG 42.5", "AWG42", "awg 42", "42", "AWG 042", "AWG -1", "AWG ٤٢", "AWG 42\n", ""]
)
def test_what_is_no_gauge(name: str) -> None:
    with pytest.raises(ValueError, match='not a gauge; write it like "AWG 42"'):
        awg_number(name)


def test_gauges_that_do_not_exist() -> None:
    with pytest.raises(ValueError, match="outside AWG 1 to AWG 56"):
        awg_number("AWG 57")
    with pytest.raises(ValueError, match="AWG 0 is outside"):
        awg_diameter_mm(0)


@pytest.mark.parametrize("row", METRIC, ids=lambda row: f"{row.bare_mm}")
def test_the_metric_table_follows_its_own_laws(row: MetricSize) -> None:
    """IEC 60317-0-1 as a wire maker printed it: the nominal is 1/58.5 at d; from 0.067 mm up the limits are
    1/59 at d + 0.003 mm and 1/58 at d - 0.003 mm. A slip of the pen in the table would not fit them."""
    d = row.bare_mm
    assert ohm_per_m_of(d, 1 / 58.5) == pytest.approx(row.ohm_per_m, abs=6e-4)
    if d >= 0.067:
        assert ohm_per_m_of(d + 0.003, 1 / 59) == pytest.approx(row.ohm_per_m_min, abs=6e-4)
        assert ohm_per_m_of(d - 0.003, 1 / 58) == pytest.approx(row.ohm_per_m_max, abs=6e-4)
    assert d < row.grade1_mm[0] < row.grade1_mm[1] <= row.grade2_mm[0] < row.grade2_mm[1]


def test_metric_sizes_take_the_table_and_sizes_between_its_law() -> None:
    assert metric_ohm_per_m(0.063) == 5.484
    assert metric_ohm_per_m(0.0631) == pytest.approx(4 / (math.pi * 58.5 * 0.0631**2), rel=1e-12)
    assert metric_ohm_per_m(0.063) > metric_ohm_per_m(0.0631) > metric_ohm_per_m(0.067)


def test_the_tolerance_of_42_gauge_is_that_of_a_datasheet() -> None:
    """A wire datasheet: AWG 42 lies between 1534 and 1801 ohm per 1000 ft."""
    datasheet = (1801 - 1534) / (1801 + 1534)
    assert tolerance_rel(awg_diameter_mm(42)) == pytest.approx(datasheet, rel=0.03)


def test_the_tolerance_beyond_the_table() -> None:
    """Half-widths computed from the printed limits (IEC 60317-0-1)."""
    assert tolerance_rel(0.063) == pytest.approx((5.922 - 5.045) / 2 / 5.484)
    assert tolerance_rel(0.040) == tolerance_rel(0.050)
    assert tolerance_rel(0.1001) == pytest.approx(tolerance_rel(0.100), rel=0.01)
    assert tolerance_rel(0.2) < tolerance_rel(0.1)
