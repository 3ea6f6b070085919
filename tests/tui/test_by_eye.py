"""A coil on a bench without a board by keys alone: K tells the counter, R the reading, U takes it back."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from textual.events import Key
from textual.pilot import Pilot
from textual.widgets import Input, Static

from tests.cli.test_by_eye import MACHINE, small
from tests.run.by_eye import port
from tests.tui.fakes import CARD, SNAPSHOT, FakeWinding, StillSession, run_of
from tests.tui.test_coil_by_keys import press, shown, until
from windctl.book.open import open_book
from windctl.desk.asked import Shared
from windctl.desk.words import BY, turns_of
from windctl.machine import by_eye
from windctl.run.requests import CountIs, Read
from windctl.run.snapshot import Check, Snapshot
from windctl.tui.app import WindctlApp
from windctl.tui.dialogs.counter import CounterPrompt
from windctl.tui.dialogs.read import ReadingPrompt
from windctl.tui.dialogs.typed import Typed
from windctl.tui.screens.before import BeforeScreen
from windctl.tui.screens.recipes import RecipesScreen
from windctl.tui.screens.wind import WindScreen
from windctl.tui.session import Session
from windctl.tui.view import glance
from windctl.tui.widgets.checklist import Checklist
from windctl.tui.widgets.hand_target import HandTarget
from windctl.tui.widgets.state_band import StateBand


async def typed(app: WindctlApp, pilot: Pilot[int], line: str) -> None:
    """A line into the dialog that is open."""
    await until(pilot, lambda: isinstance(app.focused, Input))
    await press(pilot, *line, "enter")


async def test_from_the_recipe_list_to_the_sealed_record(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(by_eye, "ByEyePort", lambda: port(6.0))  # the same on a faster clock
    small(tmp_path, 150)
    app = WindctlApp(Session(Shared(machine=str(MACHINE), book=tmp_path / "a.book"), [tmp_path]))
    async with app.run_test(size=(80, 24)) as pilot:
        room = app.screen
        assert isinstance(room, RecipesScreen)
        await until(pilot, lambda: room.chosen is not None)
        await press(pilot, "enter")
        await until(pilot, lambda: isinstance(app.screen, BeforeScreen) and bool(app.screen.query(Checklist)))
        checklist = app.screen.query_one(Checklist)
        assert any(item.startswith("the counter shows 0") for item in checklist.items)
        assert "Dry pass" not in shown(app)
        for _ in checklist.items:
            await press(pilot, "enter")
        await press(pilot, "s")
        await until(pilot, lambda: isinstance(app.screen, WindScreen) and app.screen.latest is not None)
        wind = app.screen
        assert isinstance(wind, WindScreen)

        def latest() -> Snapshot:
            assert wind.latest is not None
            return wind.latest

        await until(
            pilot, lambda: latest().asks == "count" and wind.query_one(StateBand).next.figure == "150"
        )
        assert wind.query_one(StateBand).next.when == "counter to 0 first, K"
        assert "Counter" in shown(app)
        assert not [word for word in ("HOLD", "Slower", "Faster", "SIMULATED") if word in shown(app)]
        assert not wind.query_one(HandTarget).display  # a target that nothing counts for would mislead
        await press(pilot, "1")  # a digit opens the prompt
        await until(pilot, lambda: isinstance(app.screen, CounterPrompt))
        await typed(app, pilot, "00")
        await until(pilot, lambda: latest().turns == 100 and app.screen is wind)
        per_turn = (latest().finish_ohm or 0.0) / 150
        await press(pilot, "r")
        await until(pilot, lambda: isinstance(app.screen, ReadingPrompt))
        await typed(app, pilot, f"{100 * per_turn + 1:.1f} 21,5".replace(".", ","))
        await until(pilot, lambda: latest().readings_used == 1 and app.screen is wind)
        await press(pilot, "u")
        await until(pilot, lambda: latest().readings_used == 0 and latest().turns == 100)
        await press(pilot, "k")
        await until(pilot, lambda: isinstance(app.screen, CounterPrompt))
        await typed(app, pilot, "1,5k")
        answer = app.screen.query_one("#counter-answer", Static)
        await until(pilot, lambda: "1 500 is 1 350 turns past" in str(answer.content))
        assert isinstance(app.screen, CounterPrompt)
        await typed(app, pilot, "151")
        await until(pilot, lambda: isinstance(app.screen, ReadingPrompt))  # what comes next, by itself
        assert latest().turns == 151
        await typed(app, pilot, f"{151 * per_turn + 1:.1f} 22")
        await until(pilot, lambda: wind.outcome is not None)
        assert "within" in shown(app)
    with open_book(tmp_path / "a.book", create=False, readonly=True) as book:
        (head,) = book.list()
        assert (head.outcome, head.verdict, head.turns) == ("finished", "within", 151)
        assert book.verify().broken == ()


@pytest.mark.parametrize("line", ["3200", "3 200", "3.2k", "3,2k", "3,2 K"])
def test_a_counter_is_typed_as_people_write_it(line: str) -> None:
    assert turns_of(line) == 3200.0


@pytest.mark.parametrize("line", ["", "k", "3 20", "3 2000", "32-0", "-3", "3200 turns"])
def test_what_is_no_number_is_none(line: str) -> None:
    assert turns_of(line) is None


BY_EYE = replace(
    SNAPSHOT,
    phase="waiting",
    asks="count",
    by_eye=True,
    driven=False,
    virtual=False,
    pace_rpm=0.0,
    seconds_left=None,
    tension_cn=None,
    guide_mm=None,
    slow_turn=7896.0,
    stop_u95=105.0,
    told_at_ms=1000,
)
CHECK = Check(7946.0, 90.0, 50.0, contact=False, thermometer=False)


@pytest.mark.parametrize(
    ("changed", "words", "figure", "when"),
    [
        ({}, "to", "7 946", "slow from 7 896, then K"),
        ({"turns": 7900.0}, "to", "7 946", "and stop, then K"),
        ({"turns": 0.0, "begun": False}, "to", "7 946", "counter to 0 first, K"),
        ({"turns": 7946.0, "phase": "reading", "check": CHECK}, "at turn", "7 946", "R types it"),
        ({"bared": True}, "to", "7 946", "insulate the wire first"),
        ({"hands": "unwind 50 turns, to turn 4762.25"}, "turn it back by hand", "", "then K: the counter"),
        ({"phase": "settling", "asks": None}, "the coil ends in a moment", "", "R reads it, U undoes"),
        ({"phase": "held"}, "stop your own motor", "", "windctl cannot; K: the counter"),
    ],
)
def test_what_to_do_next_is_whole_in_the_band_of_a_small_terminal(
    changed: dict[str, Any], words: str, figure: str, when: str
) -> None:
    seen = glance(replace(BY_EYE, **changed), CARD)
    assert (seen.next.words, seen.next.figure, seen.next.when) == (words, figure, when)
    assert seen.look.word in ("wind", "read", "settling", "held")  # never "turning": nobody knows
    band = StateBand()
    band.look, band.next = seen.look, seen.next
    text = "\n".join("".join(cell.char for cell in row) for row in band.drawn(80, 3))
    assert words in text
    assert when in text


@pytest.mark.parametrize(("asks", "kind"), [("", CounterPrompt), ("read", ReadingPrompt)])
async def test_of_a_number_typed_fast_no_digit_is_another_number(asks: str, kind: type[Typed]) -> None:
    app, winding = WindctlApp(StillSession([])), FakeWinding(replace(BY_EYE, turns=3000.0))
    async with app.run_test(size=(80, 24)) as pilot:
        run = run_of(winding)
        run.by_eye = True
        wind = WindScreen(app.session, run)
        await app.push_screen(wind)
        await pilot.pause()
        if asks:
            wind.action_read()
        for digit in "5940":  # all are on their way to this screen before the prompt is there
            wind.post_message(Key(digit, digit))
        await until(pilot, lambda: isinstance(app.screen, kind) and bool(app.screen.query(Input)))
        await until(pilot, lambda: app.screen.query_one(Input).value == "5940")
        assert len(app.screen_stack) == app.screen_stack.index(wind) + 2  # one prompt, not one a digit
        await press(pilot, "enter")
        await until(pilot, lambda: bool(winding.requests))
    assert winding.requests == [Read(BY, 5940.0) if asks else CountIs(BY, 5940.0)]


def test_the_figures_say_where_the_stop_lies_and_how_a_hand_lays_and_no_pace() -> None:
    rows = dict(glance(BY_EYE, replace(CARD, pass_turns=60.0)).rows)
    assert rows["stop"] == "7 946 ± 105 turns"
    assert rows["lay"] == "60 turns each way"
    assert "pace" not in rows
    assert glance(BY_EYE, CARD).under_digits == "of 7 946 · 60 % · R reads"
    assert glance(replace(BY_EYE, can_take_back=True), CARD).under_digits.endswith(" · U undoes")
