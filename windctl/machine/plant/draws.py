"""Chance for the virtual machine: the same numbers from the same seed, on every computer, in every version.

Only two things of the standard library are used: SHA-256, and `random.Random(int).random()`, whose sequence
the library promises to keep. Normal deviates are sums of twelve uniforms (Irwin and Hall): no logarithm or
sine of the platform, whose last bit differs from one C library to the next. Every quantity has a stream of
its own, named by seed and quantity, so that adding one never changes the others.
"""

from __future__ import annotations

import hashlib
import random

_PI = 3.141592653589793


class Draws:
    """One stream of random numbers, named by a seed and the quantity it is for."""

    __slots__ = ("_random",)

    def __init__(self, seed: int, name: str) -> None:
        digest = hashlib.sha256(f"virtual machine/{seed}/{name}".encode()).digest()
        self._random = random.Random(int.from_bytes(digest[:16], "big")).random

    def unit(self) -> float:
        """Uniform in 0 <= x < 1."""
        return self._random()

    def uniform(self, low: float, high: float) -> float:
        """Uniform in low <= x < high."""
        return low + (high - low) * self._random()

    def normal(self, mean: float = 0.0, sd: float = 1.0, cut: float = 4.0) -> float:
        """Normal, drawn again while further than `cut` standard deviations from the mean."""
        draw = self._random
        while True:
            # not sum(): since Python 3.12 it rounds otherwise
            z = draw() + draw() + draw() + draw() + draw() + draw()
            z += draw() + draw() + draw() + draw() + draw() + draw() - 6.0
            if -cut <= z <= cut:
                return mean + sd * z

    def whole(self, below: int) -> int:
        """A whole number in 0 <= n < below."""
        return int(self._random() * below)


def normals(seed: int, name: str, n: int) -> list[float]:
    """`n` standard normal deviates."""
    draws = Draws(seed, name)
    return [draws.normal() for _ in range(n)]


def sine(turns: float) -> float:
    """sin(2 pi turns) from its power series: only sums and products, so the same bits everywhere.

    Folded into a quarter turn either way; nine terms leave less than 1e-15.
    """
    x = turns - int(turns)
    x = x - 1.0 if x > 0.5 else x + 1.0 if x < -0.5 else x
    x = 0.5 - x if x > 0.25 else -0.5 - x if x < -0.25 else x
    angle = 2.0 * _PI * x
    square = angle * angle
    term = total = angle
    for k in range(1, 10):
        term *= -square / ((2 * k) * (2 * k + 1))
        total += term
    return total


def sine_table(n: int, cycles: int = 1) -> list[float]:
    """`n` values of `cycles` whole sine waves."""
    return [sine(i * cycles / n) for i in range(n)]
