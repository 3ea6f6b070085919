"""Stagger and ripple: what they vary, by how much, and that the mean stays the recipe's."""

from __future__ import annotations

import numpy as np
import pytest

from tests.lay.recipes import WANDER, machine, recipe
from windctl.lay.fixed import SUB
from windctl.lay.make import make_program, program_of
from windctl.lay.patterns import ripple, stagger
from windctl.lay.spec import LaySpec
from windctl.lay.turn_rounds import turn_rounds


def spec(pattern: str, amount: float, turns: int = 60_000, **more: int) -> LaySpec:
    return LaySpec(
        pattern, turns, 400, 2160, 51 * SUB, **({"amount": round(amount * 65536), "seed": 4} | more)
    )


def passes(of: LaySpec) -> tuple[np.ndarray, np.ndarray]:
    """Turns that the guide stands before, and moves in, each whole pass of a stagger."""
    travel = stagger.travel(of)
    ends = turn_rounds(of, len(travel.counts)).at
    starts = travel.counts[np.searchsorted(travel.sub_steps, ends[:1000], side="right") - 1]
    arrives = travel.counts[np.searchsorted(travel.sub_steps, ends[1:1000], side="left")]
    stands = starts[1:-1] - arrives[:-1]
    return stands / of.counts_per_turn, (arrives - starts[:-1]) / of.counts_per_turn


def test_every_pass_of_a_stagger_has_a_pitch_and_a_start_of_its_own() -> None:
    stands, moves = passes(spec("stagger", 1.0))
    mean = 2160 / 51
    assert stands.min() >= 0
    assert stands.max() <= 1.0
    assert stands.mean() == pytest.approx(0.5, abs=4 / 12**0.5 / len(stands) ** 0.5)
    assert moves.min() >= mean * 0.69 - 0.5
    assert moves.max() <= mean * 1.31
    assert moves.std() == pytest.approx(0.3 * mean / 3**0.5, rel=0.1)
    assert (moves.mean() + stands.mean()) == pytest.approx(mean, rel=0.02)
    assert len(np.unique(moves)) > 900


def test_standing_still_takes_nothing_from_the_mean_of_short_passes() -> None:
    stands, moves = passes(LaySpec("stagger", 30_000, 400, 2160, 510 * SUB, amount=65536, seed=4))
    mean = 2160 / 510
    assert stands.max() <= mean / 8
    assert moves.mean() + stands.mean() == pytest.approx(mean, rel=4 * 0.3 / 3**0.5 / len(moves) ** 0.5)


def test_a_stagger_moves_at_one_speed_within_a_pass() -> None:
    program = program_of(spec("stagger", 0.8, turns=2000), 200.0)
    moving = program.guide != 0
    pitch = np.abs(program.guide[moving]) / program.counts[moving] * 400
    direction = np.sign(program.guide[moving])
    one_pass = np.cumsum(np.diff(direction, prepend=0) != 0)
    for number in np.unique(one_pass)[:-1]:
        within = pitch[one_pass == number]
        assert within.max() - within.min() < 0.5


def test_amount_zero_is_even() -> None:
    even = program_of(spec("even", 0, turns=3000), 200.0)
    # a stagger's passes take whole counts, up to one less each: 71 of them, at 51 steps in 400 counts
    for pattern, off in (("ripple", 1), ("wander", 1), ("stagger", 71 * 51 / 400 + 1)):
        other = program_of(spec(pattern, 0, turns=3000), 200.0)
        at = np.arange(0, even.total_counts, 4001)
        gap = [even.place_of(int(count)).guide - other.place_of(int(count)).guide for count in at]
        assert np.abs(gap).max() <= off


def test_a_ripple_is_two_waves_of_the_stated_size_and_periods() -> None:
    of = spec("ripple", 1.0, turns=65_536)
    pitches = np.diff(ripple.travel(of).sub_steps) / (51 * SUB)
    assert pitches.mean() == pytest.approx(1, abs=1e-3)
    assert pitches.max() <= 1.5
    assert pitches.min() >= 0.499
    window = np.hanning(len(pitches))
    spectrum = np.abs(np.fft.rfft((pitches - 1) * window)) / window.sum() * 2
    quick, slow = 2160 / 51 * 0.72362, 2160 / 51 * 0.72362 * (1 + 5**0.5) / 2
    for period, size in ((quick, 0.3), (slow, 0.2)):
        near = round(len(pitches) / period)
        assert spectrum[near - 2 : near + 3].max() == pytest.approx(size, rel=0.16)
        spectrum[near - 6 : near + 7] = 0
    assert spectrum.max() < 0.002


def test_a_ripple_of_short_passes_stays_a_wave() -> None:
    short = LaySpec("ripple", 500, 400, 60, 50 * SUB, amount=65536, seed=1)
    assert len(np.unique(np.diff(ripple.travel(short).sub_steps))) > 100


@pytest.mark.parametrize("pattern", ["stagger", "ripple"])
def test_seeds_differ_and_the_mean_pass_is_the_recipe_s(pattern: str) -> None:
    changes = {"lay__pattern": f'"{pattern}"', "stop__turns": "100_000", "lay__reversal_spread_mm": "0.2"}
    program = make_program(recipe(WANDER, **changes), machine())
    signs = np.sign(program.guide[program.guide != 0])
    assert 100_000 / (np.diff(signs) != 0).sum() == pytest.approx(42, rel=0.01)
    other = make_program(recipe(WANDER, **changes, lay__seed="21"), machine())
    assert other.digest != program.digest
