"""Charts in characters: what is drawn stands where its value is."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from windctl.desk.text_chart import MARGIN, TextChart


def test_points_lie_on_their_rows_over_the_lines() -> None:
    chart = TextChart(5, 5, 0.0, 4.0)
    chart.level(2.0, "-", "two")
    chart.point(0, 4.0, "a")
    chart.point(1, 2.0, "b")
    chart.point(4, 0.0, "c")
    chart.point(5, 0.0, "x")  # beside the field
    chart.point(2, 9.0, "x")  # above it
    assert chart.lines([(0, "1"), (1, "22"), (4, "5")]) == [
        "          |a",
        "          |",
        "       two|-b---",
        "          |",
        "          |    c",
        "           1   5",  # 22 would touch 1
    ]


@given(st.floats(-1e6, 1e6), st.floats(1e-3, 1e6), st.floats(0.0, 1.0), st.integers(2, 40))
def test_a_value_within_the_field_has_a_row_of_it(low: float, span: float, share: float, rows: int) -> None:
    chart = TextChart(10, rows, low, low + span)
    value = min(low + share * span, low + span)
    assert 0 <= chart.row(value) < rows
    assert chart.row(low + span) == 0
    chart.point(3, value, "o")
    lines = chart.lines([])
    assert [line[MARGIN + 3 :] for line in lines].count("o") == 1
