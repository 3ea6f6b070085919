"""Joining leads, against coils simulated from Faraday's law alone.

A coil here is a list of points from its start lead to its finish lead. Nothing below knows of signs for
directions or magnets: voltages come from the flux of a field through the very path of the wire.
"""

from __future__ import annotations

import itertools
import math
import xml.etree.ElementTree as ET

import numpy as np
import pytest
from numpy.typing import NDArray

from windctl.recipe.orientation import Way
from windctl.shop.joining import OTHER_POLE, Handed, Joined, Lead, Pole, join
from windctl.shop.leads_drawn import as_svg, as_text

F64 = NDArray[np.float64]
TURNS, STEPS = 7, 24
# How the recipe's words look from the strings' side, x to the right and y up.
AROUND = {"cw": -1, "ccw": 1}
POLES: list[Pole] = ["north", "south"]
WAYS: list[Way] = ["cw", "ccw"]
CASES = list(itertools.product(WAYS, WAYS, POLES))


def wire(way: Way) -> F64:
    """Points of a spiral seen from the strings, start to finish, z towards the viewer."""
    angle = AROUND[way] * np.linspace(0.0, 2 * math.pi * TURNS, TURNS * STEPS + 1)
    radius = np.linspace(2.5e-3, 6e-3, len(angle))
    return np.column_stack([8 * radius * np.cos(angle), radius * np.sin(angle), np.zeros_like(angle)])


def emf(path: F64, potential: F64, later: F64, dt: float) -> float:
    """Along a path from its first point to its last: E = -dA/dt, summed. The end it drives charge to is
    positive, as in any source."""
    change = (later - potential) / dt
    middle, step = (change[1:] + change[:-1]) / 2, np.diff(path, axis=0)
    return float(-(middle * step).sum())


def of_dipole(path: F64, moment: float, height: float) -> F64:
    """Vector potential of a dipole along z above the coil's middle: m x r/r^3 (the constant left out)."""
    r = path - np.array([0.0, 0.0, height])
    return (
        moment
        * np.column_stack([-r[:, 1], r[:, 0], np.zeros(len(r))])
        / np.linalg.norm(r, axis=1)[:, None] ** 3
    )


def hum(coil: Handed) -> float:
    """From start to finish, in a uniform field along z that grows: A = B x r / 2."""
    path = wire(coil.way)

    def potential(tesla: float) -> F64:
        return tesla / 2 * np.column_stack([-path[:, 1], path[:, 0], np.zeros(len(path))])

    return emf(path, potential(0.0), potential(1e-6), 1e-3)


def signal(coil: Handed) -> float:
    """From start to finish, while a bit of string above the magnet comes nearer: the magnet draws a dipole
    like its own out of it, north (field lines leave it, +z) for north."""
    path = wire(coil.way)
    moment = 1.0 if coil.pole == "north" else -1.0
    return emf(path, of_dipole(path, moment, 4.1e-3), of_dipole(path, moment, 4.0e-3), 1e-3)


def between_the_ends(joined: Joined, voltage: dict[str, float]) -> float:
    """Potential of the far end over the first coil's start, walking the leads as the words say."""
    at: dict[tuple[str, Lead], float] = {(joined.first.name, "start"): 0.0}
    at[joined.first.name, "finish"] = voltage[joined.first.name]
    at[joined.second.name, joined.joint] = at[joined.first.name, "finish"]
    rise = voltage[joined.second.name] if joined.joint == "start" else -voltage[joined.second.name]
    at[joined.second.name, joined.end] = at[joined.second.name, joined.joint] + rise
    return at[joined.second.name, joined.end]


@pytest.mark.parametrize(("first", "second", "pole"), CASES)
def test_hum_cancels_and_signals_add(first: Way, second: Way, pole: Pole) -> None:
    a, b = Handed("A", first, pole), Handed("B", second, OTHER_POLE[pole])
    joined = join(a, b)
    hums = {"A": hum(a), "B": hum(b)}
    signals = {"A": signal(a), "B": signal(b)}
    assert between_the_ends(joined, hums) == pytest.approx(0.0, abs=1e-9 * abs(hums["A"]))
    both = between_the_ends(joined, signals)
    assert abs(both) == pytest.approx(abs(signals["A"]) + abs(signals["B"]))
    # the other lead of the second coil would be wrong
    wrong = Joined(a, b, joined.end)
    assert abs(between_the_ends(wrong, hums)) == pytest.approx(2 * abs(hums["A"]))
    assert between_the_ends(wrong, signals) == pytest.approx(0.0, abs=1e-9 * abs(both))
    # which end goes positive while the string comes nearer
    assert joined.positive == ((b, joined.end) if both > 0 else (a, "start"))
    assert joined.hum == 0
    assert joined.signal in (-2, 2)


@pytest.mark.parametrize(("first", "second", "pole"), CASES)
def test_in_parallel_the_leads_that_are_joined_hum_against_each_other(
    first: Way, second: Way, pole: Pole
) -> None:
    """Alike coils in parallel have the mean of both voltages between the two joints."""
    a, b = Handed("A", first, pole), Handed("B", second, OTHER_POLE[pole])
    joined = join(a, b)
    words = joined.in_parallel
    with_start: Lead = "start" if "the start of A to the start of B" in words else "finish"
    assert f"the start of A to the {with_start} of B" in words
    turned = 1 if with_start == "start" else -1
    assert hum(a) + turned * hum(b) == pytest.approx(0.0, abs=1e-9 * abs(hum(a)))
    assert abs(signal(a) + turned * signal(b)) == pytest.approx(2 * abs(signal(a)))


@pytest.mark.parametrize(("first", "second", "pole"), CASES)
def test_magnets_alike_cannot_be_joined(first: Way, second: Way, pole: Pole) -> None:
    a, b = Handed("A", first, pole), Handed("B", second, pole)
    with pytest.raises(ValueError, match="signals cancel too"):
        join(a, b)
    joints: list[Lead] = ["start", "finish"]
    for joint in joints:  # whichever lead: where hum cancels, so does the signal
        joined = Joined(a, b, joint)
        hums = between_the_ends(joined, {"A": hum(a), "B": hum(b)})
        signals = between_the_ends(joined, {"A": signal(a), "B": signal(b)})
        assert (abs(hums) < 1e-6 * abs(hum(a))) == (abs(signals) < 1e-6 * abs(signal(a)))


def test_the_words_name_every_lead_once() -> None:
    joined = join(Handed("b1-2026-0001", "cw", "north"), Handed("b1-2026-0002", "cw", "south"))
    assert joined.in_series == (
        "join the finish of b1-2026-0001 to the finish of b1-2026-0002; "
        "the pair's ends are the start of b1-2026-0001 and the start of b1-2026-0002"
    )


def test_the_text_drawing_has_both_ways_both_poles_and_the_joint() -> None:
    lines = as_text(join(Handed("b1-2026-0001", "cw", "north"), Handed("b1-2026-0002", "ccw", "south")))
    assert max(map(len, lines)) <= 80
    assert lines[0].split() == ["b1-2026-0001,", "clockwise", "b1-2026-0002,", "counter-clockwise"]
    assert ">>>" in lines[1].split("<<<")[0]
    assert "north to the strings" in lines[2]
    assert lines[4].split("===")[0].endswith("finish o")
    assert lines[4].split("===")[1].startswith("* start")


def test_the_svg_drawing_is_one_whole_image_that_asks_for_nothing() -> None:
    first = join(Handed("a <1>", "cw", "north"), Handed("b & 2", "cw", "south"))
    second = join(Handed("c", "cw", "north"), Handed("d", "ccw", "south"))
    text = as_svg([first, second])
    root = ET.fromstring(text)
    assert root.tag.endswith("svg")
    assert root.get("viewBox") == "0 0 640 440"
    said = ["".join(each.itertext()) for each in root.iter() if each.tag.endswith("text")]
    assert {"a <1>, clockwise", "d, counter-clockwise"} <= set(said)
    assert said.count("finish") == said.count("start") == 4
    assert "href" not in text
    fills = {each.get("fill") for each in root.iter() if each.get("fill")}
    assert fills <= {"black", "white", "none"}  # reads in black and white
