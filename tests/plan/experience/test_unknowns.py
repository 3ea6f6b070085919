"""What each measurement says of the unknowns, against finite differences and figures from outside."""

from __future__ import annotations

from dataclasses import replace
from math import exp, pi

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.forecast.truth import DEFAULT
from tests.plan.experience.lots import TURNS, basis, lesson
from windctl.plan.experience.gaussian import Gaussian, Name
from windctl.plan.experience.lesson import Build, Mass, Measured, Resistance, Share
from windctl.plan.experience.unknowns import expected, roles, with_unknowns

MEASURED: tuple[Measured, ...] = (
    Resistance(6000.0, 0.001),
    Share(0.1, 0.002),
    Mass(32.0, 0.02),
    Build(4.8, 0.1),
)


def belief_at(means: dict[Name, float]) -> Gaussian:
    belief = with_unknowns(Gaussian(), basis(), "s1", "d1", 0.004)
    return replace(belief, mean=tuple(means.get(name, 0.0) for name in belief.names))


@pytest.mark.parametrize("measured", MEASURED, ids=lambda one: type(one).__name__)
@settings(max_examples=25)
@given(data=st.data())
def test_the_weights_are_the_slopes(measured: Measured, data: st.DataObject) -> None:
    """Central differences of what is expected, a ten-thousandth to each side."""
    names = belief_at({}).names
    means = {name: data.draw(st.floats(-0.05, 0.05), label=str(name)) for name in names}
    told = lesson(1, (), DEFAULT, basis())
    seen = expected(belief_at(means), told, measured)
    for name in names:
        up = expected(belief_at({**means, name: means[name] + 1e-4}), told, measured).off
        down = expected(belief_at({**means, name: means[name] - 1e-4}), told, measured).off
        assert (down - up) / 2e-4 == pytest.approx(seen.row.get(name, 0.0), abs=1e-5)


def test_a_coil_that_is_as_believed_is_no_surprise() -> None:
    """Resistance and share of the nominal coil, from the formula R = rho (P0 n + pi c k n^2) itself."""
    b = basis()
    flat = b.ohm_per_m * b.perimeter_mm / 1000.0 * TURNS
    grown = b.ohm_per_m * pi * b.build_per_turn_mm * b.crown / 1000.0 * TURNS**2
    told = lesson(1, (), DEFAULT, b)
    for measured in (
        Resistance(flat + grown, 0.001),
        Share(grown / (flat + grown), 0.002),
        Build(b.build_per_turn_mm * TURNS, 0.1),
    ):
        assert expected(belief_at({}), told, measured).off == pytest.approx(0.0, abs=1e-12)


def test_mass_and_resistance_tell_thin_wire_from_loose_packing() -> None:
    """Copper of length l and area A has R = rho l / A and M = d l A (enamel besides), so l^2 = R M / (rho d):
    IEC 60028's resistivity, density from memory. A thinner wire lowers M and raises R, a longer one raises
    both.
    """

    def ohm_and_grams(bare_mm: float, overall_mm: float) -> tuple[float, float]:
        area, whole = pi / 4.0 * bare_mm**2, pi / 4.0 * overall_mm**2
        return 1.0 / 58.0 / area, 8.89 * area + 1.2 * (whole - area)

    ohm_per_m, _ = ohm_and_grams(0.0633, 0.0728)
    nominal = replace(basis(), overall_mm=0.0728, ohm_per_m=ohm_per_m)
    ohm_thin, grams_thin = ohm_and_grams(0.0633 / exp(0.02), 0.0728)
    told = lesson(1, (), DEFAULT, nominal)
    metres = nominal.coil.wire_length_m(TURNS)
    ohm, grams = metres * ohm_thin, metres * grams_thin
    believed = with_unknowns(Gaussian(), nominal, "s1", "d1", 0.0001)
    for measured in (Resistance(ohm, 0.0001), Mass(grams, 0.001)):
        seen = expected(believed, told, measured)
        believed = believed.told(seen.row, seen.off, seen.variance)
    part = roles(nominal, "s1", "d1")
    level = sum(believed.value(name) for name in part.wire)
    growth = sum(believed.value(name) for name in part.growth)
    assert level == pytest.approx(0.04, abs=0.006)  # metal and enamel are not better known
    assert abs(growth) < 0.03
    only_ohm = with_unknowns(Gaussian(), nominal, "s1", "d1", 0.0001)
    seen = expected(only_ohm, told, Resistance(ohm, 0.0001))
    blind = only_ohm.told(seen.row, seen.off, seen.variance)
    wire_row = dict.fromkeys(part.wire, 1.0)
    assert believed.covariance(wire_row, wire_row) < 0.2 * blind.covariance(wire_row, wire_row)


def test_an_error_of_the_meter_goes_into_the_resistance_alone() -> None:
    told = lesson(1, (), DEFAULT, basis())
    meter = ("meter", "d1")
    rows = [expected(belief_at({}), told, measured).row for measured in MEASURED]
    assert [row.get(meter, 0.0) for row in rows] == [1.0, 0.0, 0.0, 0.0]
    off = expected(belief_at({meter: 0.01}), told, MEASURED[0]).off
    assert off == pytest.approx(expected(belief_at({}), told, MEASURED[0]).off - 0.01)
