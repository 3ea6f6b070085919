"""The growing coil against closed forms, with every error switched off; then what the errors do."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from tests.machine.plant.worlds import BOBBIN, to_and_fro
from windctl.machine.plant.coil_growing import Coil, Spool
from windctl.machine.plant.fate import Fate, true_to
from windctl.machine.plant.spec import PlantSpec

EVEN = replace(BOBBIN, packing=0.846027, margin_mm=0.0, distance_mm=0.0)
TURNS = 8000


def wound(spec: PlantSpec, fate: Fate, turns: int = TURNS, per_pass: float = 46.37) -> tuple[Coil, Spool]:
    spool = Spool()
    path = to_and_fro(spec.margin_mm, spec.gap_mm, per_pass)
    coil = Coil(spec, fate, 1, spool, next(path))
    for _ in range(turns):
        coil.end_turn(next(path))
    return coil, spool


def closed_form_ohm(spec: PlantSpec, turns: int, crown: float) -> float:
    """R(n) = rho (P0 n + pi c k n^2), c = a / (phi h)."""
    c = math.pi / 4.0 * spec.overall_mm**2 / (spec.packing * spec.gap_mm)
    return spec.ohm_per_m * (spec.perimeter_mm * turns + math.pi * c * crown * turns**2) / 1000.0


@pytest.mark.parametrize("turns", [500, 2000, 8000])
@pytest.mark.parametrize(("margin", "crown"), [(0.0, 1.0), (0.3, 1.0577)])
def test_without_errors_resistance_follows_the_closed_form(margin: float, crown: float, turns: int) -> None:
    """Crown of an even lay that keeps 0.3 mm off each flange of an 11 mm gap: 1.0577 (computed, 11/10.4)."""
    spec = replace(EVEN, margin_mm=margin)
    coil, _ = wound(spec, true_to(spec), turns)
    assert coil.ohm == pytest.approx(closed_form_ohm(spec, turns, crown), rel=5e-4)


def test_the_worked_bobbin_takes_the_worked_length_of_wire() -> None:
    """950.797 m + 87.965 m * crown for 8000 turns (computed from P(b) = P0 + 2 pi b)."""
    coil, spool = wound(EVEN, true_to(EVEN))
    assert spool.metres == pytest.approx(950.797 + 87.965, rel=2e-4)
    assert coil.ohm == pytest.approx(5.4716 * spool.metres, rel=1e-9)


def test_a_turn_of_the_first_layer_is_as_long_as_the_core() -> None:
    coil, _ = wound(EVEN, true_to(EVEN), turns=1)
    assert coil.ohm == pytest.approx(5.4716 * EVEN.perimeter_mm / 1000.0, rel=3e-3)


def test_the_crown_comes_out_of_where_the_guide_lays() -> None:
    """A density that falls from one flange to the other, 2(1-x): crown 4/3, as for any triangle."""
    spec, spool = EVEN, Spool()
    places = [spec.gap_mm * (1.0 - math.sqrt((i * 0.6180339887) % 1.0)) for i in range(TURNS + 1)]
    coil = Coil(spec, true_to(spec), 1, spool, places[0])
    for place in places[1:]:
        coil.end_turn(place)
    assert spool.metres == pytest.approx(950.797 + 87.965 * 4.0 / 3.0, rel=5e-4)


def test_the_bins_hold_the_wire_that_went_in() -> None:
    coil, _ = wound(EVEN, replace(true_to(EVEN), slide=1.0))
    area = sum(coil.build_mm) * EVEN.gap_mm / len(coil.build_mm)
    wire = TURNS * math.pi / 4.0 * EVEN.overall_mm**2 / EVEN.packing
    assert area == pytest.approx(wire, rel=1e-9)


def test_turns_slide_down_into_an_empty_edge() -> None:
    spec = replace(EVEN, margin_mm=1.0)
    steep, _ = wound(spec, true_to(spec))
    slid, _ = wound(spec, replace(true_to(spec), slide=1.0))
    assert steep.build_mm[0] == 0.0
    assert slid.build_mm[0] > 0.5
    bins = slid.build_mm
    step = spec.gap_mm / len(bins)
    assert max(abs(a - b) for a, b in zip(bins, bins[6:], strict=False)) < 1.3 * 6 * step
    assert slid.ohm < steep.ohm  # an evener coil is a shorter wire


def test_stretched_wire_has_more_ohm_per_wound_metre_and_leaves_less_of_the_spool() -> None:
    """Constant volume: 1 % gives (1.01)^2 per piece of wire, 1.01 per wound metre."""
    plain, spool = wound(EVEN, true_to(EVEN))
    pulled, less = wound(EVEN, replace(true_to(EVEN), stretch=0.01))
    assert pulled.ohm == pytest.approx(1.01 * plain.ohm, rel=1e-12)
    assert less.metres == pytest.approx(spool.metres / 1.01, rel=1e-12)


def test_bowed_sides_lengthen_the_turns_a_little() -> None:
    plain, _ = wound(EVEN, true_to(EVEN))
    bowed, _ = wound(EVEN, replace(true_to(EVEN), bulge=0.25))
    assert 1.00005 < bowed.ohm / plain.ohm < 1.002
    assert bowed.side_build_mm == pytest.approx(1.25 * max(plain.build_mm), rel=1e-9)


def test_a_loosening_packing_puts_the_growth_late() -> None:
    plain, _ = wound(EVEN, true_to(EVEN), turns=4000)
    early, _ = wound(EVEN, replace(true_to(EVEN), loosening=0.1), turns=4000)
    assert early.ohm < plain.ohm
    whole, _ = wound(EVEN, replace(true_to(EVEN), loosening=0.1))
    assert whole.next_ohm / early.next_ohm > wound(EVEN, true_to(EVEN))[0].next_ohm / plain.next_ohm


def test_unwinding_takes_off_exactly_what_was_laid() -> None:
    fate = replace(true_to(EVEN), slide=1.0, walk_per_root_km=0.002)
    before, _ = wound(EVEN, fate, turns=700)
    coil, _ = wound(EVEN, fate, turns=1000)
    for _ in range(300):
        assert coil.take_off()
    assert coil.turns == 700
    assert coil.ohm == pytest.approx(before.ohm, rel=1e-12)
    assert coil.build_mm == pytest.approx(before.build_mm, abs=1e-9)


def test_an_empty_bobbin_cannot_be_unwound() -> None:
    coil, _ = wound(EVEN, true_to(EVEN), turns=2)
    assert [coil.take_off() for _ in range(3)] == [True, True, False]
    assert coil.ohm == 0.0


def test_wire_drifts_along_the_spool_and_goes_on_with_the_next_coil() -> None:
    fate = replace(true_to(EVEN), slope_per_km=0.01)
    first, spool = wound(EVEN, fate)
    second = Coil(EVEN, fate, 1, spool, 0.0)
    assert second.ohm_per_m == pytest.approx(first.ohm_per_m)
    assert second.ohm_per_m == pytest.approx(5.4716 * (1.0 + 0.01 * spool.metres / 1000.0), rel=1e-12)
