"""Which coils go together: as many pairs as can be, of these the ones that cost least in all, exactly.

Costs become whole numbers, so that sums are exact and equal totals are equal. Rows and columns stand in the
order of the coils' numbers, and of all assignments that cost the same the first in that order is taken: the
first coil that can be paired has the first partner that it can have, then the second, and so on. To find it,
prices are put on rows and columns (the dual solution); only where cost and prices agree can a best assignment
run, and only there are partners exchanged.
"""

from __future__ import annotations

import math
from collections import deque
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

F64 = NDArray[np.float64]
I64 = NDArray[np.int64]

MOST = 1000  # coils of either kind: the sums then stay below 2^53, where doubles are exact
_BITS = 30  # of the greatest cost: what lies below is counted as equal


def best_pairs(costs: F64) -> list[tuple[int, int]]:
    """Pairs (row, column) in order of rows. costs: f64[rows, columns], 0 or more; inf: not to be paired.

    Raises ValueError for more than 1000 rows or columns.
    """
    rows, columns = costs.shape
    if max(rows, columns) > MOST:
        raise ValueError(f"{max(rows, columns)} coils of one kind, more than {MOST}")
    allowed = np.isfinite(costs)
    if not allowed.any():
        return []
    whole = _whole(costs, allowed)
    column_of = _first_of_the_best(whole, _least(whole), _wish(allowed, len(whole)))
    return [
        (row, int(column_of[row]))
        for row in range(rows)
        if column_of[row] < columns and allowed[row, column_of[row]]
    ]


def _whole(costs: F64, allowed: NDArray[np.bool_]) -> I64:
    """The costs as whole numbers in a square. A pair that must not be costs more than all others together; a
    place for nobody costs nothing."""
    size = max(costs.shape)
    power = math.frexp(float(costs[allowed].max()))[1]
    never = size * 2**_BITS + 1
    counted = np.where(allowed, np.rint(np.ldexp(np.where(allowed, costs, 0.0), _BITS - power)), never)
    square: I64 = np.zeros((size, size), dtype=np.int64)
    square[: costs.shape[0], : costs.shape[1]] = counted.astype(np.int64)
    return square


def _wish(allowed: NDArray[np.bool_], size: int) -> I64:
    """How early a row would have a column: real partners in their order, then all that means to be alone."""
    wish: I64 = np.full((size, size), size, dtype=np.int64)
    rows, columns = allowed.shape
    wish[:rows, :columns] = np.where(allowed, np.arange(columns), size)
    return wish


def _least(whole: I64) -> I64:
    """A column for each row at the least total."""
    from scipy.optimize import linear_sum_assignment  # half a second to load: only where coils are paired

    _, column_of = linear_sum_assignment(whole.astype(np.float64))
    return np.asarray(column_of, dtype=np.int64)


def _first_of_the_best(whole: I64, column_of: I64, wish: I64) -> I64:
    """Of all assignments at the least total the one that comes first by the rows' wishes."""
    may = _may_be_best(whole, column_of)
    column_of = column_of.copy()
    row_of = np.argsort(column_of)
    alone = len(whole)
    for row in range(len(whole)):
        to_be_had = (row_of > row) | (wish[row_of, np.arange(alone)] == alone)
        better = np.flatnonzero(to_be_had & may[row] & (wish[row] < wish[row, column_of[row]]))
        for column in better[np.argsort(wish[row, better], kind="stable")]:
            if _exchange(_Exchange(may, wish, column_of, row_of), row, int(column)):
                break
    return column_of


def _may_be_best(whole: I64, column_of: I64) -> NDArray[np.bool_]:
    """Where a best assignment can run: whole[i, j] = u[i] + v[j], with prices that exceed no cost.

    v is the least that a chain of exchanges could bring each column to (Bellman and Ford); the assignment is
    best, so no chain goes round below nothing and it ends.
    """
    own = whole[np.arange(len(whole)), column_of]
    gain = whole - own[:, None]  # of giving a row another column than its own
    v: I64 = np.zeros(len(whole), dtype=np.int64)
    while True:
        lower = np.minimum(v, (v[column_of][:, None] + gain).min(axis=0))
        if (lower == v).all():
            break
        v = lower
    u = own - v[column_of]
    may: NDArray[np.bool_] = whole == u[:, None] + v[None, :]
    return may


@dataclass(frozen=True, slots=True)
class _Exchange:
    """Where a best assignment may run, what the rows would have, and who has what: the last two change."""

    may: NDArray[np.bool_]
    wish: I64
    column_of: I64
    row_of: I64

    def others(self, row: int, decided: int) -> list[int]:
        """The columns that a row could have instead of its own. A row up to `decided` may only change one
        way of being alone for another."""
        can = self.may[row]
        if row <= decided:
            can = can & (self.wish[row] == self.wish[row, self.column_of[row]])
        others: list[int] = np.flatnonzero(can).tolist()
        return others


def _exchange(given: _Exchange, row: int, column: int) -> bool:
    """Give `row` this column if all others can be served then; False where they cannot."""
    free = int(given.column_of[row])
    came: dict[int, int] = {}  # column -> the one that its taker gives up for it
    waiting = deque([column])
    while waiting and free not in came:
        giving = waiting.popleft()
        for to in given.others(int(given.row_of[giving]), row):
            if to != column and to not in came:
                came[to] = giving
                waiting.append(to)
    if free not in came:
        return False
    to = free
    while to != column:
        taker = int(given.row_of[came[to]])
        given.column_of[taker], given.row_of[to] = to, taker
        to = came[to]
    given.column_of[row], given.row_of[column] = column, row
    return True
