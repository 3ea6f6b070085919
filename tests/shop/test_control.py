"""Control charts against the NIST/SEMATECH e-Handbook, and their rules against published run lengths."""

from __future__ import annotations

import random
from statistics import fmean

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.shop.control import D2, NELSON, RULES, WESTERN_ELECTRIC, Rule, individuals, signals, wide_ranges

# NIST/SEMATECH e-Handbook 6.3.2.2, flow rates of ten batches (values from memory, they give its limits).
FLOW = (49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1)


def test_the_handbooks_example() -> None:
    """NIST/SEMATECH e-Handbook 6.3.2.2: mean 50.81, mean moving range 1.8778, limits 45.8159 and 55.8041 with
    1.128."""
    chart = individuals(FLOW)
    assert chart.centre == pytest.approx(50.81, abs=5e-3)
    assert chart.mean_range == pytest.approx(1.8778, abs=5e-5)
    assert chart.low == pytest.approx(45.8159, abs=5e-5)
    assert chart.high == pytest.approx(55.8041, abs=5e-5)
    assert signals(chart, WESTERN_ELECTRIC[:1]) == ()
    assert wide_ranges(chart) == ()


def _run_length(rules: tuple[Rule, ...], draw: random.Random) -> int:
    """How many values of a steady process it takes until a rule speaks."""
    places: list[float] = []
    while True:
        places.append(draw.gauss(0.0, 1.0))
        if any(rule.broken(places[-rule.window :]) for rule in rules):
            return len(places)


@pytest.mark.parametrize(
    ("which", "published"), [((1, 2, 3, 4), 91.75), ((1, 2), 225.44), ((1, 3), 166.05), ((1, 4), 152.73)]
)
def test_how_often_the_rules_cry_wolf(which: tuple[int, ...], published: float) -> None:
    """Average run lengths in control: Champ and Woodall, Technometrics 29, 1987, table 1 (from memory; the
    first is quoted everywhere). Their spread is about their mean: 500 runs know it to 4.5 %; four of it."""
    rules = tuple(WESTERN_ELECTRIC[number - 1] for number in which)
    draw = random.Random(92)
    mean = fmean(_run_length(rules, draw) for _ in range(500))
    assert mean == pytest.approx(published, rel=4 / 500**0.5)


STEADY = (0.5, -0.4, 0.3, -0.2, 0.6, -0.7)


def _chart(places: list[float]) -> list[tuple[str, int, int, int]]:
    """What all rules say of values that are given in sigmas; a quiet baseline fixes centre and spread."""
    quiet = [D2 / 2, -D2 / 2] * 10  # moving ranges of D2 throughout: sigma is 1
    chart = individuals([*quiet, *places], baseline=20)
    assert chart.sigma == pytest.approx(1.0) and chart.centre == pytest.approx(0.0)
    rules = WESTERN_ELECTRIC + NELSON
    found = signals(chart, [rule for rule in rules if rule not in (NELSON[3], NELSON[6])])
    return [(f"{one.rule.set[0]}{one.rule.number}", one.first - 20, one.last - 20, one.side) for one in found]


def test_each_rule_says_since_when() -> None:
    """Patterns laid out by hand after the rules' own wording."""
    assert _chart([0.1, 3.1, 0.2]) == [("W1", 1, 1, 1), ("N1", 1, 1, 1)]
    assert _chart([0.1, -2.1, 0.2, -2.2, 0.1]) == [("W2", 1, 3, -1), ("N5", 1, 3, -1)]
    assert _chart([0.1, 2.1, -0.2, -2.2, 0.1]) == []  # one on either side
    assert _chart([-2.1, -2.2, 0.1, 0.2]) == [("W2", 0, 1, -1), ("N5", 0, 1, -1)]  # over with its last one
    assert _chart([0.2, 1.1, 1.2, 0.4, 1.3, 1.4, 0.2]) == [("W3", 1, 5, 1), ("N6", 1, 5, 1)]
    eight = [-0.2, 0.3, 0.1, 0.4, 0.2, 0.5, 0.3, 0.4, 0.2, -0.3]
    assert _chart(eight) == [("W4", 1, 8, 1)]
    assert _chart([*eight[:-1], 0.1, -0.3]) == [("W4", 1, 9, 1), ("N2", 1, 9, 1)]
    assert _chart([-0.9, -0.5, -0.1, 0.2, 0.4, 0.8, 0.1]) == [("N3", 0, 5, 1)]
    assert _chart([-0.9, -0.5, -0.1, 0.2, 0.4, 0.3]) == []
    assert ("N8", 0, 7, 0) in _chart([1.2, -1.1, 1.3, -1.4, 1.1, -1.2, 1.5, -1.6])


def test_a_row_that_alternates_and_one_that_is_too_quiet() -> None:
    values = [D2 / 2, -D2 / 2] * 10
    names = {(one.rule.number, one.first, one.last) for one in signals(individuals(values), NELSON)}
    assert names == {(4, 0, 19), (7, 0, 19)}


def test_a_shift_is_out_since_the_first_coil_of_it() -> None:
    draw = random.Random(3)
    before = [draw.gauss(7900, 10) for _ in range(20)]
    after = [draw.gauss(7960, 10) for _ in range(6)]
    chart = individuals(before + after, baseline=20)
    found = signals(chart, WESTERN_ELECTRIC)
    assert min(one.first for one in found) == 20
    assert all(one.side == 1 for one in found)


@given(st.lists(st.integers(-40, 40), min_size=2, max_size=40), st.integers(1, 9), st.integers(-99, 99))
def test_units_and_signs_do_not_matter(values: list[int], scale: int, shift: int) -> None:
    """Other units give the same signals, and a mirrored chart the mirrored ones."""

    def said(row: list[int], mirror: int = 1) -> list[tuple[str, int, int, int]]:
        found = signals(individuals([float(value) for value in row]), rules)
        return sorted((one.rule.name, one.first, one.last, mirror * one.side) for one in found)

    # rules that compare with limits may differ by rounding where a value lies right on one; these do not
    rules = [rule for rule in NELSON if rule.number in (3, 4)]
    assert said([scale * value + shift for value in values]) == said(values)
    assert said([-value for value in values], -1) == said(values)


def test_coils_all_alike_are_steady_and_a_stray_one_is_out() -> None:
    assert signals(individuals([8000.0] * 30), WESTERN_ELECTRIC) == ()
    chart = individuals([8000.0] * 10 + [8001.0], baseline=10)
    assert [(one.rule.number, one.first) for one in signals(chart, WESTERN_ELECTRIC)] == [(1, 10)]
    assert wide_ranges(chart) == (10,)


def test_too_few_coils_are_no_chart() -> None:
    with pytest.raises(ValueError, match="at least 2"):
        individuals([1.0])
    with pytest.raises(ValueError, match="5 of 3 coils"):
        individuals([1.0, 2.0, 3.0], baseline=5)
    assert set(RULES) == {"western-electric", "nelson"}
