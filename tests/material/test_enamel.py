"""Enamel increases against the metric standard's table."""

from __future__ import annotations

import pytest

from windctl.material.enamel import Grade, increase_mm


@pytest.mark.parametrize(
    ("bare_mm", "grade", "least", "greatest"),
    [
        (0.063, "grade 1", 0.069, 0.076),
        (0.063, "grade 2", 0.077, 0.083),
        (0.050, "grade 1", 0.055, 0.060),
        (0.100, "grade 2", 0.118, 0.125),
    ],
)
def test_metric_sizes_are_the_table(bare_mm: float, grade: Grade, least: float, greatest: float) -> None:
    """IEC 60317-0-1, read in a wire maker's published table."""
    low, high = increase_mm(bare_mm, grade)
    assert [bare_mm + low, bare_mm + high] == pytest.approx([least, greatest])


def test_between_sizes_the_increase_is_interpolated() -> None:
    """By hand from the rows 0.063 (0.006 to 0.013 mm) and 0.067 (0.007 to 0.013 mm)."""
    assert list(increase_mm(0.064, "grade 1")) == pytest.approx([0.00625, 0.013])


def test_just_beside_the_table_its_end_row_holds() -> None:
    assert increase_mm(0.10072, "grade 1") == increase_mm(0.100, "grade 1")


@pytest.mark.parametrize("bare_mm", [0.0447, 0.113, 1.0])
def test_elsewhere_the_wire_must_be_measured(bare_mm: float) -> None:
    with pytest.raises(ValueError, match=r"only for 0\.05 to 0\.1 mm; measure the wire"):
        increase_mm(bare_mm, "grade 1")
