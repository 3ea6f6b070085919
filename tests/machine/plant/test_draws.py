"""Chance that is the same everywhere."""

from __future__ import annotations

import math
import random
import statistics

import pytest

from windctl.machine.plant.draws import Draws, normals, sine, sine_table


def test_the_librarys_generator_is_the_published_one() -> None:
    """MT19937 with the key 0x123, 0x234, 0x345, 0x456: first outputs of its authors' test file
    (Matsumoto and Nishimura, mt19937ar; the values are from memory)."""
    twister = random.Random(0x123 | 0x234 << 32 | 0x345 << 64 | 0x456 << 96)
    assert [twister.getrandbits(32) for _ in range(3)] == [1067595299, 955945823, 477289528]


def test_streams_are_told_apart_by_seed_and_name_and_repeat() -> None:
    def first(seed: int, name: str) -> float:
        return Draws(seed, name).unit()

    assert first(1, "gain") == first(1, "gain")
    assert len({first(seed, name) for seed in range(20) for name in ("gain", "offset", "tilt")}) == 60


def test_normals_have_the_moments_of_a_normal_distribution() -> None:
    values = normals(7, "moments", 20_000)
    assert statistics.fmean(values) == pytest.approx(0.0, abs=4 / math.sqrt(20_000))
    assert statistics.pstdev(values) == pytest.approx(1.0, abs=0.02)
    within = sum(abs(z) < 1.0 for z in values) / len(values)
    assert within == pytest.approx(0.6827, abs=0.015)  # of a normal distribution


def test_a_cut_is_never_passed() -> None:
    draws = Draws(3, "cut")
    values = [draws.normal(10.0, 2.0, cut=2.0) for _ in range(2000)]
    assert min(values) >= 6.0
    assert max(values) <= 14.0
    # a normal distribution cut at 2 sd keeps 0.8796 of its sd: sqrt(1 - 2*2*pdf(2)/0.9545)
    assert statistics.pstdev(values) == pytest.approx(2.0 * 0.8796, rel=0.05)


@pytest.mark.parametrize("turns", [i / 37 for i in range(-74, 75)])
def test_the_sine_is_the_sine(turns: float) -> None:
    assert sine(turns) == pytest.approx(math.sin(2.0 * math.pi * turns), abs=2e-14)


def test_a_table_of_whole_waves_sums_to_nothing() -> None:
    for cycles in (1, 2):
        assert math.fsum(sine_table(400, cycles)) == pytest.approx(0.0, abs=1e-12)
