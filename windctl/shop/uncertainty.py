"""How far measured figures can be trusted together: propagation and least squares with what they share.

Both by the Guide to the Expression of Uncertainty in Measurement (JCGM 100:2008), from memory: outputs that
depend on common inputs have the covariance J U J' (clause 5.2 and annex H.2); a straight fit with its
estimates' covariance (annex H.3), here with any covariance of what was seen, as Aitken has it.

Matrices are tuples of rows. They are small: a coil is read a dozen times in its life.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import isfinite, sqrt
from typing import TypeAlias

Vector: TypeAlias = tuple[float, ...]
Matrix: TypeAlias = tuple[Vector, ...]


@dataclass(frozen=True, slots=True)
class Fitted:
    """The unknowns of a least-squares fit. `weights`: one row per unknown, so that unknown = weights * seen.

    `residual_square`: r' inv(U) r, over `freedom` degrees of it; near `freedom` where the stated covariance
    accounts for the scatter.
    """

    values: Vector
    covariance: Matrix
    weights: Matrix
    residual_square: float
    freedom: int

    def sd(self, at: int) -> float:
        """Standard uncertainty of one unknown."""
        return sqrt(self.covariance[at][at])


def propagated(sensitivities: Sequence[Sequence[float]], covariance: Sequence[Sequence[float]]) -> Matrix:
    """J U J': the covariance of outputs, `sensitivities` having one row per output and a column per input."""
    across = [
        [sum(c * u for c, u in zip(row, column, strict=True)) for column in covariance]
        for row in sensitivities
    ]
    return tuple(
        tuple(sum(x * c for x, c in zip(row, other, strict=True)) for other in sensitivities)
        for row in across
    )


def correlation(covariance: Sequence[Sequence[float]], one: int, other: int) -> float:
    """The correlation coefficient of two of the outputs."""
    return covariance[one][other] / sqrt(covariance[one][one] * covariance[other][other])


def least_squares(
    design: Sequence[Sequence[float]],
    seen: Sequence[float],
    covariance: Sequence[Sequence[float]] | None = None,
) -> Fitted:
    """The unknowns x of design * x = seen. Without `covariance` all that was seen counts alike, and how
    far it scatters about the fit says how uncertain it was (needs more values than unknowns).

    Raises ValueError where the values do not determine the unknowns, or the covariance is none.
    """
    n, m = len(seen), len(design[0])
    if covariance is None:
        if n <= m:
            raise ValueError(f"{n} values leave no scatter about {m} unknowns")
        unit = tuple(tuple(1.0 if i == j else 0.0 for j in range(n)) for i in range(n))
        fitted = least_squares(design, seen, unit)
        square = fitted.residual_square / fitted.freedom
        scaled = tuple(tuple(square * c for c in row) for row in fitted.covariance)
        return Fitted(fitted.values, scaled, fitted.weights, fitted.residual_square, fitted.freedom)
    root = _root(covariance)
    columns = [_forward(root, [row[k] for row in design]) for k in range(m)]
    whitened = _forward(root, list(seen))
    normal = [[_dot(a, b) for b in columns] for a in columns]
    inverse = _inverse(normal)
    values = tuple(_dot(row, [_dot(a, whitened) for a in columns]) for row in inverse)
    back = [_backward(root, column) for column in columns]  # inv(U) * design, column by column
    weights = tuple(tuple(_dot(row, [b[i] for b in back]) for i in range(n)) for row in inverse)
    left = [y - _dot(values, [a[i] for a in columns]) for i, y in enumerate(whitened)]
    return Fitted(values, tuple(tuple(row) for row in inverse), weights, _dot(left, left), n - m)


def _dot(a: Sequence[float], b: Sequence[float]) -> float:
    return sum(x * y for x, y in zip(a, b, strict=True))


def _root(matrix: Sequence[Sequence[float]]) -> list[list[float]]:
    """The lower triangle L of L L' (Cholesky)."""
    lower: list[list[float]] = []
    for i, row in enumerate(matrix):
        mine: list[float] = []
        for j in range(i):
            mine.append((row[j] - _dot(mine, lower[j][:j])) / lower[j][j])
        square = row[i] - _dot(mine, mine)
        if not (isfinite(square) and square > 1e-12 * abs(row[i])):
            raise ValueError("these values are not independent enough to be weighed against each other")
        lower.append([*mine, sqrt(square)])
    return lower


def _forward(lower: Sequence[Sequence[float]], right: Sequence[float]) -> list[float]:
    solved: list[float] = []
    for row, value in zip(lower, right, strict=True):
        solved.append((value - _dot(row[:-1], solved)) / row[-1])
    return solved


def _backward(lower: Sequence[Sequence[float]], right: Sequence[float]) -> list[float]:
    """inv(L') * right."""
    n = len(right)
    solved = [0.0] * n
    for i in reversed(range(n)):
        known = sum(lower[j][i] * solved[j] for j in range(i + 1, n))
        solved[i] = (right[i] - known) / lower[i][i]
    return solved


def _inverse(matrix: Sequence[Sequence[float]]) -> list[list[float]]:
    root = _root(matrix)
    n = len(matrix)
    columns = [_backward(root, _forward(root, [1.0 if i == j else 0.0 for i in range(n)])) for j in range(n)]
    return [[columns[j][i] for j in range(n)] for i in range(n)]
