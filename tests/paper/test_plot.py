"""Axes and plots: ticks are round, values stand where they belong, and a chart is well-formed."""

from __future__ import annotations

import math
import re
import xml.etree.ElementTree as ET
from dataclasses import replace
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.paper import svg
from windctl.paper.plot import (
    Beside,
    Entry,
    Plot,
    axis,
    axis_over,
    categories,
    nice_step,
    nice_ticks,
    room_beside,
)

NS = "{http://www.w3.org/2000/svg}"


@given(st.floats(1e-9, 1e9), st.integers(1, 20))
def test_a_step_is_round_and_the_smallest_that_fits(span: float, most: int) -> None:
    step = nice_step(span, most)
    lead = step / 10 ** math.floor(math.log10(step * (1 + 1e-9)))
    assert min(abs(lead - round_one) for round_one in (1, 2, 2.5, 5)) < 1e-6
    assert step * most >= span * (1 - 1e-6)
    assert step / 2.5 * most < span * (1 + 1e-6)  # a next finer one would not fit


@given(st.floats(-1e6, 1e6), st.floats(1e-3, 1e6), st.integers(2, 12))
def test_ticks_lie_within_and_say_what_they_are(low: float, span: float, most: int) -> None:
    ticks = nice_ticks(low, low + span, most)
    assert len(ticks) <= most + 1
    for tick in ticks:
        assert low - 1e-6 * span <= tick.value <= low + span * (1 + 1e-6)
        assert math.isclose(float(tick.text.replace(" ", "")), tick.value, abs_tol=1e-6 * span)
    assert len({tick.text for tick in ticks}) == len(ticks)


def test_an_axis_holds_its_values_also_when_all_are_one() -> None:
    for values in ([3.0, 3.0], [0.0], [-1.0, 7.3]):
        made = axis_over(values, "u")
        assert made.low <= min(values) <= max(values) <= made.high and made.low < made.high
        assert len(made.ticks) >= 2


def test_things_in_a_row_are_thinned_in_name_only() -> None:
    made = categories([f"c{n}" for n in range(30)], "coil", most=10)
    assert [tick.text for tick in made.ticks] == [f"c{n}" for n in range(0, 30, 3)]
    assert (made.low, made.high) == (-0.5, 29.5)


PLOT = Plot("p", axis(0, 100, "turns"), axis(0, 10, "ohm"), width=720, height=300)


def test_values_stand_where_they_belong() -> None:
    assert PLOT.at(0, 0) == (62, 300 - 44)
    assert PLOT.at(100, 10) == (720 - 16, 30)
    (x, y), (left, bottom), (right, top) = PLOT.at(50, 5), PLOT.at(0, 0), PLOT.at(100, 10)
    assert (x, y) == ((left + right) / 2, (bottom + top) / 2)


def points_of(markup: str) -> list[list[tuple[float, float]]]:
    found = re.findall(r'points="([^"]*)"', markup)
    return [[(float(x), float(y)) for x, y in (p.split(",") for p in one.split())] for one in found]


def test_a_missing_value_breaks_a_line() -> None:
    first, second = points_of(PLOT.polyline([(0, 1), (1, 2), (2, None), (3, 3), (4, 4)]))
    assert len(first) == len(second) == 2
    assert first[0] == pytest.approx(PLOT.at(0, 1), abs=0.01)


def test_steps_have_only_level_and_upright_parts() -> None:
    (corners,) = points_of(PLOT.steps([(0, 1), (10, 4), (20, 2)]))
    assert len(corners) == 5
    for (x0, y0), (x1, y1) in pairwise(corners):
        assert x0 == x1 or y0 == y1


def test_a_band_goes_out_below_and_back_above() -> None:
    (corners,) = points_of(PLOT.band([(0, 1, 2), (10, 2, 4)]))
    assert corners == [pytest.approx(PLOT.at(*p), abs=0.01) for p in ((0, 1), (10, 2), (10, 4), (0, 2))]


def test_a_chart_is_well_formed_and_the_same_each_time() -> None:
    def draw() -> str:
        return PLOT.drawn(
            "A & B <c>",
            "told",
            PLOT.band([(0, 1, 2), (10, 2, 4), (200, 5, 6)]),
            PLOT.polyline([(0, 1), (200, 5)], svg.DASHED),
            PLOT.marks([(3, 3)], "ring"),
            PLOT.bars([(5, 1, 3)]),
            PLOT.across(4),
            PLOT.upright(80, words="stop & go"),
            PLOT.words(10, 9, "words"),
            legend=[Entry("one", svg.SOLID), Entry("two", None, "box"), Entry("three", fill=svg.SAND)] * 4,
            beside=[Beside(4, "t <t>")],
        )

    text = draw()
    assert text == draw()
    root = ET.fromstring(text)
    assert root.findtext(f"{NS}title") == "A & B <c>"
    idents = [one.get("id") for one in root.iter() if one.get("id")]
    assert len(idents) == len(set(idents)) and all(ident and ident.startswith("p-") for ident in idents)
    for one in root.iter(f"{NS}text"):  # a legend of two rows included
        assert 0 <= float(one.get("x", "nan")) <= 720 and 0 <= float(one.get("y", "nan")) <= 300


@pytest.mark.parametrize("levels", [[4.0], [4.0, 4.01, 3.99], [0.0, 0.01, 10.0, 9.9], [5.0] * 8])
def test_words_to_a_level_stand_beside_the_frame_and_not_on_each_other(levels: list[float]) -> None:
    """Nothing of the data is drawn right of the frame."""
    words = [f"limit {n} kohm" for n in range(len(levels))]
    plot = replace(PLOT, right=room_beside(words))
    text = plot.drawn("t", "d", beside=[Beside(y, each) for y, each in zip(levels, words, strict=True)])
    placed = [one for one in ET.fromstring(text).iter(f"{NS}text") if (one.text or "").startswith("limit")]
    right, bottom = plot.at(plot.x.high, plot.y.low)
    _, top = plot.at(plot.x.high, plot.y.high)
    heights = sorted(float(one.get("y", "nan")) for one in placed)
    assert len(placed) == len(levels)
    assert all(float(one.get("x", "nan")) > right for one in placed)
    assert all(right + svg.text_width(one.text or "") < plot.width for one in placed)
    assert top <= heights[0] and heights[-1] <= bottom + 5
    assert all(lower - higher >= 12 for higher, lower in pairwise(heights))
    if levels == [4.0]:
        assert heights[0] - plot.at(0, 4.0)[1] == pytest.approx(4.0, abs=0.01)  # beside the line
