"""Unknown coils that grow by their own laws (`unknown_truth.py`): wire, length and turns from outside."""

from __future__ import annotations

from dataclasses import replace
from math import log, pi

import numpy as np
import pytest

from tests.conftest import LONG
from tests.shop.unknown_truth import draw
from windctl.coil.geometry import Core
from windctl.errors import UsageError
from windctl.shop.one_wire import Outside
from windctl.shop.unknown_coil import identify

FIRST_SEED = 40_000

# A racetrack core, 50 mm straight, 3 mm end radius, gap 11 mm; 8000 turns of AWG 42 (0.06334 mm, 1/58 ohm
# mm2/m) with 0.0725 mm over the enamel, packing 0.63, flat: worked out from the formulas themselves.
TURNS, BARE, OVERALL = 8000, 0.06334, 0.0725
PERIMETER = 100.0 + 6.0 * pi
BUILD = TURNS * pi / 4.0 * OVERALL**2 / (0.63 * 11.0)
METRES = TURNS * (PERIMETER + pi * 1.06 * BUILD) / 1000.0
OHM = METRES / 58.0 / (pi / 4.0 * BARE**2)
GRAMS = METRES * pi / 4.0 * (8.89 * BARE**2 + 1.2 * (OVERALL**2 - BARE**2))
WORKED = Outside(
    ohm=OHM, ohm_rel=0.003, celsius=20.0, celsius_sd=0.5, core=Core(25.0, 0.0, 3.0), gap_mm=11.0,
    build_mm=1.04 * BUILD, build_sd_mm=0.1,
)  # fmt: skip


def test_the_worked_coil_is_found() -> None:
    """Mass tells the gauge beyond doubt; the enamel weighs a good twentieth of it."""
    found = identify(replace(WORKED, grams=GRAMS, grams_sd=0.05), enamel="grade 1", style="scatter")
    assert found.sizes[0].name == "AWG 42"
    assert found.sizes[0].odds > 1000
    assert found.turns.value == pytest.approx(TURNS, rel=0.015)
    assert found.length_m.value == pytest.approx(METRES, rel=0.01)
    assert found.bare_mm.value == pytest.approx(BARE, rel=0.01)
    assert found.turns.low < TURNS < found.turns.high < 1.05 * TURNS
    blind = identify(WORKED)
    assert blind.turns.high / blind.turns.low > 1.2  # without it, a fifth one way or the other
    assert blind.turns.low < TURNS < blind.turns.high


def test_what_the_enamel_weighs_is_counted() -> None:
    """A mass of the copper alone would make the wire too long and too thick by half of that twentieth."""
    enamel = METRES * pi / 4.0 * 1.2 * (OVERALL**2 - BARE**2)
    assert 0.03 < enamel / GRAMS < 0.06
    found = identify(replace(WORKED, grams=GRAMS, grams_sd=0.02), enamel="grade 1", style="scatter")
    assert abs(log(found.length_m.value / METRES)) < 0.25 * enamel / GRAMS


def test_a_micrometer_tells_the_size_where_the_grade_is_known() -> None:
    """0.0725 mm over the enamel is AWG 42 in grade 1 or AWG 43 in grade 2 (0.069 to 0.076 mm about 0.063 mm,
    0.068 to 0.074 mm about 0.056 mm: IEC 60317-0-1)."""
    measured = replace(WORKED, overall_mm=OVERALL)
    known, blind = identify(measured, enamel="grade 1"), identify(measured)
    assert known.sizes[0].name == "AWG 42"
    assert known.sizes[0].probability > 0.999
    assert {(one.size, one.enamel) for one in blind.candidates if one.probability > 0.01} == {
        ("AWG 42", "grade 1"),
        ("AWG 43", "grade 2"),
    }
    assert known.turns.high - known.turns.low < 0.8 * (blind.turns.high - blind.turns.low)


def test_what_is_known_of_enamel_and_lay_narrows_it() -> None:
    known, blind = identify(WORKED, enamel="grade 1", style="scatter"), identify(WORKED)
    assert known.sizes[0].probability > blind.sizes[0].probability
    assert {one.enamel for one in known.candidates} == {"grade 1"}
    assert sum(size.probability for size in blind.sizes) == pytest.approx(1.0)


def test_metric_sizes() -> None:
    found = identify(replace(WORKED, grams=GRAMS), sizes="metric")
    assert found.sizes[0].name == "0.063 mm"
    assert found.bare_mm.value == pytest.approx(BARE, rel=0.01)


def test_what_no_wire_can_be_is_refused() -> None:
    for wrong in (
        replace(WORKED, ohm=OHM / 1000.0),  # kilohm taken for ohm
        replace(WORKED, build_mm=0.5, build_sd_mm=0.02),
        replace(WORKED, grams=GRAMS / 10.0),
    ):
        with pytest.raises(UsageError, match="no wire from AWG 38 to AWG 44 makes a coil of"):
            identify(wrong)


def test_warm_copper_is_taken_to_20_degrees() -> None:
    """IEC 60028: 0.393 % a degree."""
    cold, warm = identify(WORKED), identify(replace(WORKED, ohm=OHM * (1.0 + 0.00393 * 6.0), celsius=26.0))
    assert warm.turns.value == pytest.approx(cold.turns.value, rel=1e-9)


@pytest.mark.parametrize("weighed", [True, False], ids=["with mass", "without mass"])
def test_a_thousand_unknown_coils(weighed: bool) -> None:
    """Intervals of turns, length and diameter hold in 91 to 99 %; the right gauge is named first, as often
    as its odds say."""
    held, first, foreseen = np.zeros(3), 0, 0.0
    number = 1000 if LONG else 70
    for n in range(number):
        truth = draw(FIRST_SEED + n, weighed=weighed)
        found = identify(truth.outside)
        for place, (interval, true) in enumerate(
            ((found.turns, truth.turns), (found.length_m, truth.metres), (found.bare_mm, truth.bare_mm))
        ):
            held[place] += interval.low <= true <= interval.high
        first += found.sizes[0].name == truth.gauge
        foreseen += found.sizes[0].probability
    assert (held / number >= (0.91 if LONG else 0.88)).all()
    assert (held / number <= (0.99 if LONG else 1.0)).all()
    assert first / number >= (0.995 if weighed else 0.80 if LONG else 0.75)
    assert first / number == pytest.approx(foreseen / number, abs=0.03 if LONG else 0.12)
