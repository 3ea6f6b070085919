"""A wire from what is known of it."""

from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.material.wire import Wire, bare_mm_of, resolve


def test_a_gauge_size_takes_the_law_and_the_interpolated_enamel() -> None:
    """AWG 42: law of ASTM B258 with 1/58 (computed); enamel by hand from the rows of IEC 60317-0-1."""
    wire = resolve(gauge="AWG 42", enamel="grade 1")
    assert wire.bare_mm == pytest.approx(0.06334, abs=5e-6)
    assert wire.ohm_per_m == pytest.approx(5.4716, abs=5e-5)
    least = 0.006 + 0.001 * (wire.bare_mm - 0.063) / 0.004
    assert wire.overall_mm == pytest.approx(wire.bare_mm + (least + 0.013) / 2)
    assert wire.overall_sd_mm == pytest.approx((0.013 - least) / 4)
    assert wire.label == "AWG 42, grade 1"


def test_a_metric_size_is_its_row() -> None:
    """IEC 60317-0-1, 0.063 mm: 0.069 to 0.076 mm overall, 5.045 / 5.484 / 5.922 ohm/m. A range is four sd."""
    wire = resolve(diameter_mm=0.063, enamel="grade 1")
    assert wire.overall_mm == pytest.approx(0.0725)
    assert wire.overall_sd_mm == pytest.approx(0.007 / 4)
    assert wire.ohm_per_m == 5.484
    assert wire.ohm_per_m_sd == pytest.approx((5.922 - 5.045) / 4)


def test_the_grades_range_is_a_tenth_of_the_area_either_way() -> None:
    """The printed limits of 0.063 mm grade 1, as areas: about 10 % either way of the middle."""
    wire = resolve(diameter_mm=0.063, enamel="grade 1")
    spread = (0.076**2 - 0.069**2) / 2 / wire.overall_mm**2
    assert spread == pytest.approx(0.10, abs=0.005)
    assert 2 * 2 * wire.overall_sd_mm / wire.overall_mm == pytest.approx(spread, rel=0.01)


def test_what_was_measured_beats_the_tables() -> None:
    wire = resolve(gauge="AWG 42", overall_mm=0.072, ohm_per_m=5.6, ohm_per_m_sd=0.01)
    assert (wire.overall_mm, wire.ohm_per_m, wire.ohm_per_m_sd) == (0.072, 5.6, 0.01)
    assert wire.overall_sd_mm == pytest.approx(0.001)
    assert wire.label == "AWG 42, 0.072 mm overall"


def test_a_measured_resistance_is_surer_than_the_table() -> None:
    measured = resolve(gauge="AWG 42", enamel="grade 1", ohm_per_m=5.5)
    assert measured.ohm_per_m_sd == pytest.approx(0.055)
    assert measured.ohm_per_m_sd < resolve(gauge="AWG 42", enamel="grade 1").ohm_per_m_sd / 3


def test_mass_is_copper_and_enamel() -> None:
    """Copper 8.89 g/cm3, enamel 1.2 g/cm3, both from memory; AWG 42's copper alone is 0.0280 g/m."""
    wire = resolve(gauge="AWG 42", overall_mm=0.072)
    copper = math.pi / 4 * wire.bare_mm**2 * 8.89
    assert copper == pytest.approx(0.0280, abs=5e-5)
    assert wire.mass_g_per_m - copper == pytest.approx(math.pi / 4 * (0.072**2 - wire.bare_mm**2) * 1.2)
    assert wire.copper_area_mm2 < wire.overall_area_mm2 == pytest.approx(math.pi * 0.036**2)


@pytest.mark.parametrize(
    ("known", "said"),
    [
        ({"enamel": "grade 1"}, "exactly one of gauge and diameter_mm"),
        (
            {"gauge": "AWG 42", "diameter_mm": 0.063, "enamel": "grade 1"},
            "exactly one of gauge and diameter_mm",
        ),
        ({"gauge": "AWG 42"}, "exactly one of enamel and overall_mm"),
        ({"gauge": "AWG 42", "overall_mm": 0.06}, "less than the bare 0.06334 mm"),
        ({"gauge": "AWG 30", "enamel": "grade 1"}, "no enamel range is known for 0.2546 mm"),
        ({"diameter_mm": 0.0, "overall_mm": 0.06}, "must be more than 0 mm"),
    ],
)
def test_an_impossible_wire_is_refused(known: dict[str, object], said: str) -> None:
    with pytest.raises(ValueError, match=said):
        resolve(**known)  # type: ignore[arg-type]  # the point of the test is what the types do not rule out


@given(st.floats(0.05, 0.1))
def test_every_size_of_the_table_gives_a_wire_that_can_exist(bare: float) -> None:
    thin = resolve(diameter_mm=bare, enamel="grade 1")
    thick = resolve(diameter_mm=bare, enamel="grade 2")
    for wire in (thin, thick):
        assert isinstance(wire, Wire)
        assert wire.overall_mm - 2 * wire.overall_sd_mm > wire.bare_mm == bare_mm_of(None, bare)
        assert 0.02 < wire.ohm_per_m_sd / wire.ohm_per_m < 0.06
    assert thick.overall_mm > thin.overall_mm
    assert thick.mass_g_per_m > thin.mass_g_per_m
