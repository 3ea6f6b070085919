"""Whole coils by keys alone in a real terminal, each from the recipe list to the sealed record.

`WINDCTL_LONG=1 .venv/bin/python -m pytest -q tests/tui/test_coils_in_tmux.py` winds all of them; without it
only the first is wound.
"""

from __future__ import annotations

import time
from pathlib import Path

import pytest

from tests.cli.recipes import to_resistance, to_turns
from tests.run.bench_side import Served
from tests.tui.tmux import THERE, Tmux, tmux
from windctl.book.heads import CoilHead
from windctl.book.open import open_book
from windctl.machine.plant.faults import Faults
from windctl.plan.make import make_plan
from windctl.profile.load import parse_profile
from windctl.recipe.load import load_recipe
from windctl.record.events import (
    CheckTaken,
    Event,
    ReadingTakenBack,
    ReadingTyped,
    Resumed,
    Spliced,
    WireBroke,
)

pytestmark = pytest.mark.skipif(not THERE, reason="platform: no tmux")

NAME = "[red]x[/]"
BY_HAND = """\
format = 1
name = "bench of the test"
bench = "t1"
[spindle]
drive = "step"
counts_per_turn = 400
index = true
[guide]
kind = "step"
backlash_mm = 0.05
[readings]
mode = "checks"
contact = false
"""


def named(recipe: Path) -> Path:
    """The recipe with a name that looks like markup."""
    recipe.write_text(recipe.read_text(encoding="utf-8").replace("demo small coil", NAME), encoding="utf-8")
    return recipe


def to_the_machine(terminal: Tmux) -> None:
    """From the recipe list to the coil on the machine."""
    terminal.shows("program")
    assert NAME in terminal.screen
    terminal.press("Enter")
    terminal.shows("Confirm each line")
    for _ in range(12):
        terminal.press("Enter")
    terminal.shows("S opens the machine")
    # On a machine of its own there is something to be done there first.
    then = said_below(terminal, "○ S opens the machine").partition("Then there:")[2]
    for key, what in (("z", "contact zeroed"), ("p", "dry pass")):
        if what in then:
            terminal.press(key)
    terminal.shows("and sets it")
    terminal.press("s")


def said_below(terminal: Tmux, words: str) -> str:
    """The text that begins with `words`, over the lines that it takes, without what stands beside it."""
    lines = terminal.screen.splitlines()
    first = next(at for at, line in enumerate(lines) if words in line)
    left = lines[first].index(words)
    return " ".join(line[left:].strip() for line in lines[first : first + 4])


def to_the_record(terminal: Tmux) -> None:
    """From the end of a coil to its record, which agrees with its digests, and out."""
    terminal.shows("Enter: its record", seconds=120)
    assert "SIMULATED" in terminal.screen
    terminal.press("Enter")
    terminal.shows("Verify")
    terminal.press("v")
    terminal.shows("agrees with its digests")
    assert NAME in terminal.screen
    terminal.press("F10")
    terminal.shows("ended with 0")


def sealed(book: Path) -> tuple[CoilHead, list[Event]]:
    """The one coil in the book and its facts; the record verifies."""
    with open_book(book, create=False, readonly=True) as opened:
        assert opened.verify().broken == ()
        (head,) = opened.list()
        assert head.sealed
        return head, list(opened.events(head.number))


@pytest.mark.parametrize("size", [(80, 24), pytest.param((120, 40), marks=pytest.mark.long)], ids=str)
def test_a_coil_from_the_list_to_its_sealed_record(tmp_path: Path, size: tuple[int, int]) -> None:
    named(to_turns(tmp_path, 300))
    book = tmp_path / "a.book"
    with tmux(tmp_path, size) as terminal:
        terminal.start("--machine", "virtual", "--speed", "40", "--book", str(book))
        to_the_machine(terminal)
        to_the_record(terminal)
    head, _ = sealed(book)
    assert (head.recipe, head.outcome, head.turns) == (NAME, "finished", 300)


@pytest.mark.long
def test_a_coil_that_is_read_by_hand(tmp_path: Path) -> None:
    """A check is prompted; a value a thousand times off is asked about, a wrong one taken back by one key."""
    recipe = named(to_resistance(tmp_path, 200.0, 200, 400))
    machine = tmp_path / "bench.toml"
    machine.write_text(BY_HAND, encoding="utf-8")
    profile = parse_profile(BY_HAND)
    plan = make_plan(load_recipe(recipe), profile)
    shown = 200.0 * (1 + 0.00393 * 3.2) + 1.3  # at 22.5 °C, 0.7 K over the air, with leads
    book = tmp_path / "a.book"
    with tmux(tmp_path) as terminal:
        terminal.start("--machine", str(machine), "--port", "virtual", "--speed", "40", "--book", str(book))
        to_the_machine(terminal)
        terminal.shows("Read the resistance at turn", seconds=120)
        assert "never on the coil" in terminal.screen
        terminal.type(f"{shown / 1e6:.6f}k 22.5")
        terminal.shows("a thousand times off")
        terminal.type(f"{0.9 * shown:.1f} 22,5".replace(".", ","))
        terminal.shows("takes the reading back", "at 20 °C after")
        terminal.press("u")
        terminal.shows("typed last is taken", "Read the resistance at turn")
        time.sleep(0.5)
        if "Read the resistance" not in terminal.screen:
            terminal.press("r")
        terminal.shows("Read the resistance at turn")
        terminal.type(f"{shown:.1f} 22.5".replace(".", ","))
        to_the_record(terminal)
    head, events = sealed(book)
    assert head.outcome == "finished"
    typed = [event for event in events if isinstance(event, ReadingTyped)]
    assert len(typed) >= 2
    assert len([event for event in events if isinstance(event, ReadingTakenBack)]) == 1
    assert any(isinstance(event, CheckTaken) and event.read for event in events)
    assert abs(head.turns - float(plan.turns)) < 0.15 * float(plan.turns)  # type: ignore[operator]  # it is known


@pytest.mark.long
def test_a_coil_whose_wire_breaks_and_is_joined(tmp_path: Path) -> None:
    recipe = named(to_turns(tmp_path, 150))
    text = recipe.read_text(encoding="utf-8").replace("[stop]", "[tension]\nset_cn = 12\nband_cn = 6\n[stop]")
    recipe.write_text(text, encoding="utf-8")
    book = tmp_path / "a.book"
    served = Served(text, faults=Faults(wire_breaks_at_turn=70))
    try:
        with tmux(tmp_path) as terminal:
            terminal.start("--machine", "virtual", "--port", served.url, "--book", str(book))
            to_the_machine(terminal)
            terminal.shows("tension low")
            terminal.shows("press C")
            terminal.press("c")
            terminal.shows("Clear the trip?")
            terminal.type("clear")
            terminal.shows("press G", "G goes on", "hands may go in")
            terminal.press("t")
            terminal.shows("What happened?")
            terminal.type("splice")
            terminal.shows("spliced at turn")
            terminal.press("g")
            terminal.shows("Go?")
            terminal.type("go")
            to_the_record(terminal)
    finally:
        served.stop()
    head, events = sealed(book)
    assert (head.outcome, head.turns) == ("finished", 150)
    assert [type(event) for event in events if isinstance(event, WireBroke | Spliced)] == [WireBroke, Spliced]


@pytest.mark.long
def test_a_coil_whose_terminal_is_closed_and_that_is_gone_on_with(tmp_path: Path) -> None:
    recipe = named(to_turns(tmp_path, 150))
    book = tmp_path / "a.book"
    served = Served(recipe.read_text(encoding="utf-8"))
    try:
        with tmux(tmp_path) as terminal:
            terminal.start("--machine", "virtual", "--port", served.url, "--book", str(book))
            to_the_machine(terminal)
            terminal.shows("turns from 0")
            end = time.monotonic() + 60
            while served.count_turns < 40:
                assert time.monotonic() < end
                time.sleep(0.05)
            terminal.close_terminal()
            end = time.monotonic() + 10
            while not served.standing:
                assert time.monotonic() < end, "it still turns"
                time.sleep(0.05)
        with open_book(book, create=False, readonly=True) as opened:
            (head,) = opened.list()
            assert head.outcome == "open"
        with tmux(tmp_path) as terminal:
            terminal.start("--machine", "virtual", "--port", served.url, "--book", str(book))
            terminal.shows(f"open: {head.number}")  # said first
            terminal.press("r")
            terminal.shows(f"Go on with {head.number}?")
            terminal.press("y")
            terminal.shows("taken up again")
            if terminal.shows("press G", "slows at", "stops at") == "press G":
                terminal.press("g")
                terminal.shows("Go?")
                terminal.type("go")
            to_the_record(terminal)
    finally:
        served.stop()
    head, events = sealed(book)
    assert (head.outcome, head.turns) == ("finished", 150)
    assert len([event for event in events if isinstance(event, Resumed)]) == 1
