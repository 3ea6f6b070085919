"""Fit judged on the bulging side, with its uncertainty."""

from __future__ import annotations

import pytest

from windctl.coil.fit import bulge, judge_fit
from windctl.coil.geometry import Core

RACETRACK = Core(25, 0, 3)
ROUND = Core(0, 0, 10)


def test_long_sides_bulge_within_common_practice() -> None:
    more, sd = bulge(RACETRACK)
    assert more - 2 * sd + 1e-12 >= 0.05  # 5 to 25 %: common practice, no source
    assert more + 2 * sd <= 0.25 + 1e-12


def test_a_round_core_does_not_bulge() -> None:
    assert bulge(ROUND) == (0, 0)
    assert judge_fit(ROUND, 3.0, 0.0, 3.0).side_build_mm == 3.0


@pytest.mark.parametrize(
    ("build", "fits"), [(1.0, "yes"), (3.0, "yes"), (3.8, "tight"), (4.2, "tight"), (4.4, "no"), (9.0, "no")]
)
def test_the_more_build_the_worse(build: float, fits: str) -> None:
    assert judge_fit(RACETRACK, build, 0.1, 5.0).fits == fits


def test_less_knowledge_is_more_caution() -> None:
    assert judge_fit(RACETRACK, 3.5, 0.02, 5.0).fits == "yes"
    assert judge_fit(RACETRACK, 3.5, 0.2, 5.0).fits == "tight"
