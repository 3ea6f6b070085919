"""Curves against the first one's, and what was set otherwise: against curves whose law is known."""

from __future__ import annotations

import json

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.shop.compare import Compared, at, curves, differing, settings_of


def grown(number: str, per_turn: float, growth: float, turns: float, every: float) -> Compared:
    """A coil of R(n) = a*n + b*n^2/2, read every so many turns from there on."""
    points = [every * n for n in range(1, int(turns / every) + 1)]
    curve = tuple((n, per_turn * n + growth * n * n / 2) for n in points)
    return Compared(number, "demo", "", turns, curve[-1][1] if curve else None, None, "", curve, {})


def test_the_difference_is_that_of_the_laws() -> None:
    """Read at other turns each; straight lines between points bend by growth*step^2/8 at most."""
    a = grown("a", 0.66, 6e-5, 8000, 16)
    b = grown("b", 0.67, 5e-5, 7000, 23)
    found = curves([a, b, a])
    assert found.turns[0] == 16.0  # a, against itself, is comparable from its first reading on
    assert found.turns[-1] == a.curve[-1][0]
    for turn, off, none in zip(found.turns, found.differences[1], found.differences[2], strict=True):
        assert none == 0.0
        if 23 <= turn <= b.curve[-1][0]:
            assert off == pytest.approx(0.01 * turn - 1e-5 * turn**2 / 2, abs=6e-5 * (16**2 + 23**2) / 8)
        else:
            assert off is None
    last = found.last(1)
    assert last is not None and last[0] <= b.curve[-1][0] < last[0] + 8000 / 100


def test_coils_that_were_not_read_have_no_curve() -> None:
    a, none = grown("a", 0.66, 6e-5, 8000, 100), grown("n", 0.66, 6e-5, 10, 100)
    assert curves([a, none]).turns == ()
    assert curves([none, a]).differences == ((), ())
    found = curves([a, none, a])
    assert found.last(1) is None and found.last(2) == (8000.0, 0.0)


@given(st.lists(st.floats(0.5, 50.0), min_size=2, max_size=20), st.floats(0.0, 1.0))
def test_between_points_a_straight_line_is_itself(steps: list[float], share: float) -> None:
    turns = [sum(steps[: n + 1]) for n in range(len(steps))]
    curve = [(turn, 3.0 * turn + 1.0) for turn in turns]
    turn = turns[0] + share * (turns[-1] - turns[0])
    assert at(curve, min(turn, turns[-1])) == pytest.approx(3.0 * turn + 1.0)
    assert at(curve, turns[-1] + 1.0) is None


def test_only_what_was_set_otherwise_is_shown() -> None:
    recipe = {"format": 1, "name": "demo", "lay": {"pitch_mm": 0.22, "seed": 1}, "stop": {"turns": 8000}}
    other = {**recipe, "lay": {"pitch_mm": 0.24, "seed": 1}, "wire": {"gauge": "AWG 43"}}
    profile = {"format": 1, "port": {"url": "a"}, "spindle": {"max_rpm": 1000.0, "index": True}}
    moved = {**profile, "port": {"url": "b"}, "spindle": {"max_rpm": 800.0, "index": True}}
    coils = [
        Compared("", "", "", None, None, None, "", (), settings_of(json.dumps(r), json.dumps(p), spool=spool))
        for r, p, spool in ((recipe, profile, "s1"), (other, moved, ""), (recipe, profile, "s1"))
    ]
    assert [(one.name, one.values) for one in differing(coils)] == [
        ("spool", ("s1", None, "s1")),
        ("recipe.lay.pitch_mm", (0.22, 0.24, 0.22)),
        ("machine.spindle.max_rpm", (1000.0, 800.0, 1000.0)),
        ("recipe.wire.gauge", (None, "AWG 43", None)),
    ]
    assert differing(coils[:1]) == ()
