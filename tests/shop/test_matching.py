"""From candidates to pairs: what a pair costs, how coils sit, and in which order they stand."""

from __future__ import annotations

import math

import numpy as np
import pytest

from windctl.coil.geometry import Core
from windctl.coil.turns_area import Winding
from windctl.recipe.orientation import Way
from windctl.shop.enclosed import Enclosed
from windctl.shop.joining import Handed, Pole
from windctl.shop.matching import Candidate, Sitting, best, costs

CORE = Core(26.5, 0.0, 2.5)


def told(*turns: float, sd: float = 0.01, common: float = 0.8) -> Enclosed:
    """Coils that differ by their counts alone, equally unsure, most of it in common."""
    n = len(turns)
    cov = sd**2 * (common * np.ones((n, n)) + (1 - common) * np.eye(n))
    return Enclosed(tuple(Winding(CORE, 5.0) for _ in turns), turns, cov)


def coil(serial: int, pole: Pole, way: Way = "cw", form: str = "long", half: float = 11.0) -> Candidate:
    return Candidate(Handed(f"b1-2026-{serial:04d}", way, pole), ("b1", 2026, serial), form, 6.5, half)


def test_a_pair_costs_the_expected_square_of_what_it_leaves() -> None:
    """By drawing turns-areas and squaring what is left of their sum."""
    areas = told(5000.0, 5050.0, 4990.0, sd=0.02, common=0.5)
    each = costs(areas, [0], [1, 2])
    rng = np.random.default_rng([12])
    logs = np.log([5000.0, 5050.0, 4990.0]) + rng.multivariate_normal(np.zeros(3), areas.log_cov, 200_000)
    drawn = np.exp(logs)
    for column, other in enumerate((1, 2)):
        left = (drawn[:, 0] - drawn[:, other]) / (drawn[:, 0] + drawn[:, other])
        assert each[0, column] == pytest.approx(np.mean(left**2), rel=0.02)
        assert each[0, column] == pytest.approx(areas.mismatch(0, other).square, rel=1e-9)


def test_candidates_may_come_in_any_order() -> None:
    turns = {1: 5000.0, 2: 5010.0, 3: 5011.0, 4: 5001.0}
    poles: dict[int, Pole] = {1: "north", 2: "north", 3: "south", 4: "south"}
    for order in ([1, 2, 3, 4], [4, 2, 1, 3], [3, 4, 2, 1]):
        candidates = [coil(serial, poles[serial]) for serial in order]
        pairs = best(candidates, told(*(turns[serial] for serial in order)), Sitting())
        named = [(order[pair.north], order[pair.south]) for pair in pairs]
        assert named == [(1, 4), (2, 3)]


def test_equal_coils_go_together_by_number() -> None:
    candidates = [coil(9, "south"), coil(2, "north"), coil(7, "north"), coil(8, "south")]
    pairs = best(candidates, told(*[5000.0] * 4), Sitting())
    assert [(pair.joined.first.name, pair.joined.second.name) for pair in pairs] == [
        ("b1-2026-0002", "b1-2026-0008"),
        ("b1-2026-0007", "b1-2026-0009"),
    ]


def test_without_both_poles_there_is_no_pair() -> None:
    assert best([coil(1, "north"), coil(2, "north")], told(5000.0, 5000.0), Sitting()) == ()
    assert best([], told(), Sitting()) == ()


def test_other_forms_and_too_much_hum_are_no_pair() -> None:
    candidates = [coil(1, "north"), coil(2, "south", form="short")]
    areas = told(5000.0, 5000.0)
    assert best(candidates, areas, Sitting()) == ()
    (pair,) = best(candidates, areas, Sitting(), any_form=True)
    level = pair.left.db
    assert level == pytest.approx(20 * math.log10(0.01 * math.sqrt(0.4) / 2), abs=0.01)
    assert best(candidates, areas, Sitting(), any_form=True, at_most_db=level - 0.01) == ()
    assert len(best(candidates, areas, Sitting(), any_form=True, at_most_db=level + 0.01)) == 1


def test_coils_sit_as_close_as_their_flanges_let_them_unless_told() -> None:
    one, other = coil(1, "north", half=11.0), coil(2, "south", half=15.0)
    assert Sitting().between(one, other) == 26.0
    assert Sitting(stacked=True).between(one, other) == pytest.approx(6.5 + 2 * 1.5)
    assert Sitting(apart_mm=40.0).between(one, other) == 40.0
