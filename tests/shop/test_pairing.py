"""Which coils go together, against trying everything."""

from __future__ import annotations

import functools
import itertools
import math

import numpy as np
import pytest
from numpy.typing import NDArray

from windctl.shop.pairing import MOST, best_pairs

F64 = NDArray[np.float64]


@functools.cache
def permuted(size: int) -> NDArray[np.int64]:
    """All orders of so many columns, one a row."""
    return np.array(list(itertools.permutations(range(size))), dtype=np.int64)


def by_trying(costs: F64) -> tuple[int, float, list[tuple[int, int]]]:
    """(pairs, total, the pairs): as many as can be, then least in all, then the first in order, by looking at
    every way to give each row a column or none."""
    rows, columns = costs.shape
    size = max(rows, columns)
    padded = np.zeros((size, size))
    never = np.zeros((size, size))
    padded[:rows, :columns] = np.where(np.isfinite(costs), costs, 0.0)
    never[:rows, :columns] = ~np.isfinite(costs)
    ways = permuted(size)
    index = np.arange(size)
    missed, totals = never[index, ways].sum(axis=1), padded[index, ways].sum(axis=1)
    fewest = missed == missed.min()
    least = totals[fewest].min()
    best = ways[fewest & (totals <= least)]
    partner = np.where(
        np.pad(np.isfinite(costs), ((0, size - rows), (0, size - columns)))[index, best], best, size
    )
    first = min(map(tuple, partner[:, :rows].tolist()))
    pairs = [(row, column) for row, column in enumerate(first) if column < size]
    return len(pairs), float(least), pairs


@pytest.mark.parametrize(("rows", "columns"), list(itertools.product(range(1, 9), repeat=2)))
def test_no_other_way_is_better(rows: int, columns: int) -> None:
    """All sizes up to eight by eight: costs drawn freely, some pairs not allowed."""
    rng = np.random.default_rng([3, rows, columns])
    for share in (0.0, 0.4):
        costs = rng.random((rows, columns)) ** 4
        costs[rng.random(costs.shape) < share] = np.inf
        pairs = best_pairs(costs)
        n, total, known = by_trying(costs)
        assert len(pairs) == n
        assert math.fsum(costs[pair] for pair in pairs) == pytest.approx(total, rel=1e-7)
        assert pairs == known


@pytest.mark.parametrize("seed", range(40))
def test_of_equal_ways_the_first_in_the_coils_order_is_taken(seed: int) -> None:
    """Costs of a few whole numbers: most totals can be had in many ways."""
    rng = np.random.default_rng([4, seed])
    rows, columns = rng.integers(1, 8, 2)
    costs = rng.integers(0, rng.integers(1, 4), (rows, columns)).astype(np.float64)
    costs[rng.random(costs.shape) < rng.choice([0.0, 0.3, 0.6])] = np.inf
    assert best_pairs(costs) == by_trying(costs)[2]


def test_coils_that_cannot_be_told_apart_go_together_by_number() -> None:
    assert best_pairs(np.full((5, 5), 0.3)) == [(n, n) for n in range(5)]
    assert best_pairs(np.zeros((2, 4))) == [(0, 0), (1, 1)]
    assert best_pairs(np.zeros((4, 2))) == [(0, 0), (1, 1)]


def test_the_least_in_all_is_not_each_coils_own_best() -> None:
    costs = np.array([[0.0, 1.0], [0.1, 9.0]])
    assert best_pairs(costs) == [(0, 1), (1, 0)]


def test_more_pairs_go_before_cheaper_ones() -> None:
    costs = np.array([[0.0, 5.0], [np.inf, np.inf], [5.0, np.inf]])
    assert best_pairs(costs) == [(0, 1), (2, 0)]


def test_where_nothing_is_allowed_nothing_is_paired() -> None:
    assert best_pairs(np.full((3, 2), np.inf)) == []
    assert best_pairs(np.zeros((0, 2))) == []


def test_the_order_of_the_coils_does_not_change_the_total() -> None:
    rng = np.random.default_rng([6])
    costs = rng.random((30, 25))
    total = sum(costs[pair] for pair in best_pairs(costs))
    turned = costs[rng.permutation(30)][:, rng.permutation(25)]
    assert sum(turned[pair] for pair in best_pairs(turned)) == pytest.approx(total, rel=1e-7)


def test_a_stock_beyond_what_is_exact_is_refused() -> None:
    with pytest.raises(ValueError, match="more than 1000"):
        best_pairs(np.zeros((MOST + 1, 2)))
