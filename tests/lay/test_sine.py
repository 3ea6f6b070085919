"""The integer sine against published digits of pi and the platform's sine."""

from __future__ import annotations

import math

import numpy as np

from windctl.lay.sine import pi_fixed, sine

# 50 decimals of pi, as in any table.
PI = 314159265358979323846264338327950288419716939937510


def test_pi() -> None:
    bits = 160
    assert abs(pi_fixed(bits) - (PI << bits) // 10**50) <= 2


def test_sine_is_close_everywhere() -> None:
    phase = np.random.default_rng(1).integers(-(2**33), 2**34, 20_000)
    ideal = np.sin(phase.astype(float) / 2**32 * 2 * math.pi)
    assert np.abs(sine(phase) / 2**30 - ideal).max() < 3.5e-7


def test_the_quarters_are_exact_and_the_halves_mirror() -> None:
    quarter = np.arange(5) * 2**30
    assert sine(quarter).tolist() == [0, 2**30, 0, -(2**30), 0]
    places = np.arange(4096) * 2**20
    assert (sine(places) == -sine(places + 2**31)).all()
