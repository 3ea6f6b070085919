"""Segments against a slow, exact reckoning of where the guide should be, count by count."""

from __future__ import annotations

from bisect import bisect_right
from dataclasses import replace
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from windctl.lay.fixed import SUB
from windctl.lay.make import program_of
from windctl.lay.patterns import PATTERNS
from windctl.lay.program import Program
from windctl.lay.spec import LaySpec
from windctl.lay.travel import Travel
from windctl.lay.turn_rounds import turn_rounds


def ideal(spec: LaySpec, counts: list[int]) -> list[Fraction]:
    """Where the guide should be at each of `counts`, in steps: the pattern's travel, folded pass by pass."""
    travel = PATTERNS[spec.pattern](spec)
    at_counts, gone_to = travel.counts.tolist(), travel.sub_steps.tolist()
    rounds = turn_rounds(spec, gone_to[-1] // ((spec.stroke - 2 * spec.spread) * SUB) + 2)
    ats, places = rounds.at.tolist(), rounds.places.tolist()
    found = []
    for count in counts:
        i = min(bisect_right(at_counts, count), len(at_counts) - 1)
        run, rise = at_counts[i] - at_counts[i - 1], gone_to[i] - gone_to[i - 1]
        at = gone_to[i - 1] + Fraction(rise * (count - at_counts[i - 1]), run)
        number = max(i for i, reached in enumerate(ats) if reached <= at)
        gone = (at - ats[number]) / SUB
        found.append(places[number] + (gone if number % 2 == 0 else -gone))
    return found


def guide_at(program: Program, counts: list[int]) -> list[int]:
    """The guide's place at `counts`: the motor's, less the play it has crossed."""
    places: dict[int, int] = {}
    guide = 0
    for count in sorted({*counts, *program.count_marks.tolist()}):
        motor = program.place_of(count).guide
        guide = max(motor, min(guide, motor + program.backlash_steps))
        places[count] = guide
    return [places[count] for count in counts]


specs = st.builds(
    LaySpec,
    pattern=st.sampled_from(sorted(PATTERNS)),
    turns=st.integers(1, 120),
    counts_per_turn=st.sampled_from([40, 100, 400]),
    stroke=st.integers(60, 2500),
    pitch=st.integers(1, 10 * SUB),
    amount=st.integers(0, 65536),
    seed=st.integers(0, 2**63 - 1),
    spread=st.integers(0, 12),
    wander_turns=st.fractions(Fraction(1, 4), 200),
    backlash=st.integers(0, 12),
    take_up=st.integers(30, 900),
)


@given(specs)
@settings(max_examples=150)
def test_a_program_keeps_to_its_counts_and_its_stroke(spec: LaySpec) -> None:
    program = program_of(spec, 200.0)
    assert program.total_counts == spec.total_counts
    assert program.guide_marks.min() >= -spec.backlash
    assert program.guide_marks.max() <= spec.stroke
    assert (np.abs(program.guide.astype(int)) <= program.counts).all()
    passes = spec.turns * 2 * spec.pitch // ((spec.stroke - 2 * spec.spread) * SUB) + 1
    assert program.segments <= spec.turns + 2 * passes


@given(specs)
@settings(max_examples=60)
def test_segments_end_where_the_pattern_is(spec: LaySpec) -> None:
    """Within half a step; at a turn-round the count is whole, and the pattern up to a count past it."""
    spec = replace(spec, backlash=0)
    program = program_of(spec, 200.0)
    marks = program.count_marks.tolist()
    turned = np.flatnonzero(np.diff(np.sign(program.guide)) != 0) + 1
    most = max(1, 2 * spec.pitch // spec.counts_per_turn // SUB + 1)
    for i, exact in enumerate(ideal(spec, marks)):
        off = abs(int(program.guide_marks[i]) - exact)
        assert off <= (most if i in turned else Fraction(1, 2))


@given(specs, st.integers(1, 12))
@settings(max_examples=60)
def test_the_guide_goes_the_same_way_whatever_the_play(spec: LaySpec, backlash: int) -> None:
    """But for the first counts after a turn-round, in which the play is taken up."""
    plain = program_of(replace(spec, backlash=0), 200.0)
    played = program_of(replace(spec, backlash=backlash), 200.0)
    turns = np.concatenate([[0], np.flatnonzero(np.diff(np.sign(plain.guide)) != 0) + 1])
    marks = plain.count_marks
    settled = [
        int(count)
        for count in marks
        if count == 0 or count - marks[turns[np.searchsorted(marks[turns], count) - 1]] > spec.take_up + 400
    ]
    for a, b in zip(guide_at(plain, settled), guide_at(played, settled), strict=True):
        assert abs(a - b) <= 1
    assert played.guide_marks.min() >= -backlash


def test_an_even_pass_is_one_segment() -> None:
    spec = LaySpec("even", turns=1000, counts_per_turn=100, stroke=2000, pitch=20 * SUB)
    program = program_of(spec, 200.0)
    assert program.counts.tolist() == [100 * 100] * 10
    assert program.guide.tolist() == [2000, -2000] * 5


def test_a_pass_that_is_no_whole_number_of_counts_does_not_drift() -> None:
    # 2161 steps at 16 steps a turn of 400 counts: 54025 counts a pass; at 15: 57626.67.
    spec = LaySpec("even", turns=100_000, counts_per_turn=400, stroke=2161, pitch=15 * SUB)
    program = program_of(spec, 200.0)
    exact = [-(-k * 2161 * 400 // 15) for k in range(program.segments)]
    assert program.count_marks[:-1].tolist() == exact


def test_a_long_pass_is_cut_into_what_a_segment_holds() -> None:
    spec = LaySpec("even", turns=2000, counts_per_turn=400, stroke=40_000, pitch=60 * SUB)
    program = program_of(spec, 4000.0)
    assert program.counts.max() <= 65_535
    assert program.total_counts == 800_000
    passes = np.add.reduceat(
        program.guide.astype(int), np.flatnonzero(np.diff(np.sign(program.guide), prepend=0))
    )
    assert np.abs(passes[:-1]).tolist() == [40_000] * (len(passes) - 1)


def test_the_play_is_taken_up_after_each_turn_round() -> None:
    spec = LaySpec("even", 1000, 100, 2000, 20 * SUB, backlash=30, take_up=250)
    program = program_of(spec, 200.0)
    back = [(250, -50 - 30), (9750, -1950)]
    out = [(250, 50 + 30), (9750, 1950)]
    expected = [(10_000, 2000)] + [*back, *out] * 4 + back
    assert list(zip(program.counts.tolist(), program.guide.tolist(), strict=True)) == expected


def test_a_turn_round_at_the_very_last_count_is_not_overrun() -> None:
    # 10 turns of 30.06 steps: the end of the stroke is reached 0.8 counts before the program ends
    program = program_of(LaySpec("even", 10, 40, 300, 30 * SUB + SUB * 6 // 100), 200.0)
    assert program.guide.tolist() == [300]


def test_play_is_taken_up_within_half_a_pass() -> None:
    plain = LaySpec("even", 200, 100, 500, 20 * SUB)
    program = program_of(replace(plain, backlash=30, take_up=10**6), 200.0)
    later = [count for count in range(0, 20_000, 50) if count % 2500 >= 1300]
    for here, there in zip(guide_at(program, later), guide_at(program_of(plain, 200.0), later), strict=True):
        assert abs(here - there) <= 1


def test_travel_is_looked_up_both_ways() -> None:
    travel = Travel(np.array([0, 10, 15, 25]), np.array([0, 100, 100, 300]), bends=True)
    assert travel.at(np.array([0, 5, 10, 12, 20, 25])).tolist() == [0, 50, 100, 100, 200, 300]
    assert travel.reached(np.array([1, 95, 100, 101, 300])).tolist() == [1, 10, 10, 16, 25]


def test_a_longer_program_begins_with_the_shorter_one() -> None:
    for pattern in ("even", "wander", "ripple"):
        spec = {
            "counts_per_turn": 400,
            "stroke": 2160,
            "pitch": 50 * SUB,
            "amount": 40_000,
            "seed": 3,
            "spread": 30,
        }
        short = program_of(LaySpec(pattern, 1000, **spec), 200.0)
        long = program_of(LaySpec(pattern, 1500, **spec), 200.0)
        same = short.segments - 2
        assert (long.counts[:same] == short.counts[:same]).all()
        assert (long.guide[:same] == short.guide[:same]).all()


def test_turn_rounds_spread_inwards_only() -> None:
    spec = LaySpec("wander", 1, 400, 2000, SUB, seed=5, spread=80)
    rounds = turn_rounds(spec, 4000)
    near, far = rounds.places[2::2], rounds.places[1::2]
    assert rounds.places[0] == 0
    assert (near.min(), near.max(), far.min(), far.max()) == (0, 80, 1920, 2000)
    assert near.mean() == pytest.approx(40, abs=4 * 81 / 12**0.5 / 2000**0.5)
