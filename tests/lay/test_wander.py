"""The wander is an Ornstein-Uhlenbeck process around the pitch."""

from __future__ import annotations

import math
from fractions import Fraction

import numpy as np
import pytest

from windctl.lay.fixed import SUB
from windctl.lay.patterns.wander import ornstein_uhlenbeck, travel
from windctl.lay.spec import LaySpec

TURNS = 200_000


def spec(amount: int, wander_turns: int = 12, turns: int = TURNS, seed: int = 8) -> LaySpec:
    return LaySpec(
        "wander", turns, 400, 2160, 50 * SUB, amount=amount, seed=seed, wander_turns=Fraction(wander_turns)
    )


@pytest.mark.parametrize("wander_turns", [3, 12, 60])
def test_variance_one_and_a_correlation_that_falls_to_one_over_e(wander_turns: int) -> None:
    x = ornstein_uhlenbeck(spec(0, wander_turns)) / 65536
    # the variance of a mean of correlated values: 2 t / N times theirs
    assert x.mean() == pytest.approx(0, abs=4 * (2 * wander_turns / TURNS) ** 0.5)
    assert x.var() == pytest.approx(1, abs=4 * (2 * wander_turns / TURNS) ** 0.5)
    for lag in (1, wander_turns):
        correlation = (x[lag:] * x[:-lag]).mean() / x.var()
        assert correlation == pytest.approx(math.exp(-lag / wander_turns), abs=0.03)


def test_no_correlation_length_is_white() -> None:
    white = LaySpec("wander", 50_000, 400, 2160, 50 * SUB, seed=1, wander_turns=Fraction(1, 4))
    x = ornstein_uhlenbeck(white) / 65536
    assert (x[1:] * x[:-1]).mean() == pytest.approx(0, abs=4.5 / 50_000**0.5)


def test_amount_scales_the_pitch_around_its_mean() -> None:
    for amount in (6554, 32768):
        pitches = np.diff(travel(spec(amount)).sub_steps) / (50 * SUB)
        assert pitches.mean() == pytest.approx(1, abs=0.01)
        assert pitches.std() == pytest.approx(amount / 65536 / 2, rel=0.05)


def test_the_guide_never_stands_however_much_it_wanders() -> None:
    pitches = np.diff(travel(spec(65536)).sub_steps) / (50 * SUB)
    assert pitches.min() >= 0.199
    assert pitches.max() <= 1.801


def test_no_amount_is_an_even_pitch() -> None:
    assert np.unique(np.diff(travel(spec(0, turns=500)).sub_steps)).tolist() == [50 * SUB]


def test_seeds_differ() -> None:
    assert (travel(spec(32768, seed=1)).sub_steps != travel(spec(32768, seed=2)).sub_steps).any()


def scalar_philox(number: int, seed: int, stream: int) -> list[int]:
    """The published rounds on plain Python integers."""
    c = [number, 0, stream, 0]
    k = [seed & 0xFFFFFFFF, seed >> 32]
    for _ in range(10):
        p, q = c[0] * 0xD2511F53, c[2] * 0xCD9E8D57
        c = [q >> 32 ^ c[1] ^ k[0], q & 0xFFFFFFFF, p >> 32 ^ c[3] ^ k[1], p & 0xFFFFFFFF]
        k = [(k[0] + 0x9E3779B9) & 0xFFFFFFFF, (k[1] + 0xBB67AE85) & 0xFFFFFFFF]
    return c


def test_the_same_in_plain_integers() -> None:
    """The whole recurrence again, one Python integer at a time: no array arithmetic takes part."""
    seed = 2**40 + 17
    keep = round(Fraction(2 * 12 - 1, 2 * 12 + 1) * 2**20)
    kick = math.isqrt(2**40 - keep**2)
    norm = math.isqrt(3 * 2**64 // (8 * (2**32 - 1)))
    x = 0
    for turn, pitch in enumerate(np.diff(travel(spec(45_000, turns=300, seed=seed)).sub_steps).tolist()):
        total = sum((word & 0xFFFF) + (word >> 16) for word in scalar_philox(turn, seed, 1))
        drawn = ((2 * total - 8 * 0xFFFF) * norm + 2**15) >> 16
        x = drawn if turn == 0 else (keep * x + kick * drawn + 2**19) >> 20
        deviation = max(-52429, min(52429, ((x * 45_000) >> 16) * 32768 >> 16))
        assert pitch == 50 * SUB + (50 * SUB * deviation >> 16)
