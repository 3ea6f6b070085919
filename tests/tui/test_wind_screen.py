"""The run screen's keys and prompts: which requests they become, and what is shown of the answers."""

from __future__ import annotations

from collections.abc import AsyncIterator
from contextlib import asynccontextmanager
from dataclasses import replace
from pathlib import Path

import pytest
from textual.pilot import Pilot
from textual.widgets import Input, Static

from tests.tui.fakes import SNAPSHOT, FakeWinding, StillSession, run_of
from windctl.desk.words import WORDS
from windctl.plan.by_hand import HandLay
from windctl.run.requests import Faster, Read, Request, Skip, Slower, TakeBack
from windctl.run.snapshot import Check
from windctl.tui.app import WindctlApp
from windctl.tui.dialogs.read import ReadingPrompt
from windctl.tui.dialogs.tell import SAID
from windctl.tui.pictures.cells import texts
from windctl.tui.pictures.hand import HEIGHT, hand_picture
from windctl.tui.screens.wind import WindScreen
from windctl.tui.widgets.hand_target import HandTarget

CHECK = Check(4812.0, 490.0, 31.0, contact=True, thermometer=True)
TO_READ = replace(SNAPSHOT, phase="held", asks="reading", drives_off=True, check=CHECK)


@asynccontextmanager
async def at_the_coil(
    folder: Path, winding: FakeWinding, hand: HandLay | None = None
) -> AsyncIterator[tuple[WindctlApp, WindScreen, Pilot[int]]]:
    app = WindctlApp(StillSession([folder]))
    async with app.run_test(size=(80, 24)) as pilot:
        run = run_of(winding)
        run.lay_by_hand = hand
        app.session.run = run
        screen = WindScreen(app.session, run)
        await app.push_screen(screen)
        await pilot.pause()
        yield app, screen, pilot


@pytest.mark.parametrize(("key", "meant"), [("s", Slower("operator")), ("f", Faster("operator"))])
async def test_slower_and_faster_are_a_key_each(tmp_path: Path, key: str, meant: Request) -> None:
    winding = FakeWinding()
    async with at_the_coil(tmp_path, winding) as (_, _, pilot):
        await pilot.press(key)
        assert winding.requests == [meant]


async def test_a_check_opens_its_prompt_once_and_takes_the_reading(tmp_path: Path) -> None:
    winding = FakeWinding(TO_READ)
    async with at_the_coil(tmp_path, winding) as (app, _, pilot):
        await pilot.pause(0.3)
        prompt = app.screen
        assert isinstance(prompt, ReadingPrompt)
        await pilot.press(*"3,44")
        await pilot.press("k", "enter")
        assert winding.requests == [Read("operator", 3440.0)]
        answer = prompt.query_one("#reading-answer", Static)
        winding.change(answers=1, answer="3440 ohm [b]is[/b] about a thousand times off")
        await pilot.pause(0.3)
        assert str(answer.content) == "3440 ohm [b]is[/b] about a thousand times off"
        assert app.screen is prompt  # asked again, not taken
        await pilot.press(*"warm", "enter")
        assert "Type what the meter shows" in str(answer.content)
        await pilot.press("escape")
        await pilot.pause(0.3)
        assert isinstance(app.screen, WindScreen)  # once is enough: it does not open again by itself
        await pilot.press("r")
        assert isinstance(app.screen, ReadingPrompt)
        await pilot.press(*"skip", "enter")
        assert winding.requests[-1] == Skip("operator")
        winding.change(check=None, asks="go")
        await pilot.pause(0.3)
        assert isinstance(app.screen, WindScreen)


async def test_the_prompt_waits_for_the_drives_and_leaves_other_questions_alone(tmp_path: Path) -> None:
    winding = FakeWinding(replace(TO_READ, drives_off=False, asks=None))
    async with at_the_coil(tmp_path, winding) as (app, screen, pilot):
        await pilot.pause(0.3)
        assert app.screen is screen
        await pilot.press("n")  # somebody writes a note meanwhile
        winding.change(drives_off=True, asks="reading")
        await pilot.pause(0.3)
        assert not isinstance(app.screen, ReadingPrompt)
        await pilot.press("escape")
        await pilot.pause(0.3)
        assert isinstance(app.screen, ReadingPrompt)


async def test_a_typed_reading_is_taken_back_by_one_key_and_only_while_it_can(tmp_path: Path) -> None:
    winding = FakeWinding(replace(SNAPSHOT, phase="held", asks="go"))
    async with at_the_coil(tmp_path, winding) as (_, _, pilot):
        await pilot.press("u")
        assert winding.requests == []
        winding.change(can_take_back=True)
        await pilot.pause(0.3)
        await pilot.press("u")
        assert winding.requests == [TakeBack("operator")]


async def test_a_reading_is_typed_where_no_check_was_asked_for(tmp_path: Path) -> None:
    winding = FakeWinding()
    async with at_the_coil(tmp_path, winding) as (app, screen, pilot):
        await pilot.press("r")
        assert app.screen is screen  # it turns
        winding.change(phase="held", asks="go", drives_off=True)
        await pilot.pause(0.2)
        await pilot.press("r", *"3440 22.5", "enter")
        assert winding.requests == [Read("operator", 3440.0, 22.5)]
        winding.change(can_take_back=True)
        await pilot.pause(0.3)
        assert app.screen is screen
        assert not isinstance(app.focused, Input)


def test_every_word_that_is_offered_is_one() -> None:
    usages = {word.usage for word in WORDS}
    assert {usage for usage, _ in SAID} <= usages


LAY = HandLay(gap_mm=10.4, margin_mm=0.2, pass_turns=60.0, start_flange="base")


def test_the_target_for_the_hand_moves_there_and_back_and_counts_down() -> None:
    at = {}
    for turn in (6.0, 30.0, 54.0, 66.0, 90.0):
        rows = texts(hand_picture(44, HEIGHT, LAY, turn, turning=True))
        at[turn] = rows[0].index("███")
        assert rows[0].find("▶▶" if turn < 60 else "◀◀") > 0
        assert rows[0][0] == "▐" and rows[0][43] == "▌"
    assert at[6.0] < at[30.0] < at[54.0]
    assert at[54.0] > at[90.0]
    assert abs(at[54.0] - at[66.0]) <= 1  # as far before the turn-round as after it


def test_close_to_a_turn_round_it_says_so() -> None:
    soon = texts(hand_picture(44, HEIGHT, LAY, 58.0, turning=True))
    assert any("NOW" in row for row in soon)
    assert not any("NOW" in row for row in texts(hand_picture(44, HEIGHT, LAY, 50.0, turning=True)))
    still = texts(hand_picture(44, HEIGHT, LAY, 58.0, turning=False))
    assert any("hand here" in row for row in still)
    assert any("to the face" in row for row in still)


async def test_the_target_is_there_where_a_hand_guides_and_only_there(tmp_path: Path) -> None:
    for hand in (LAY, None):
        async with at_the_coil(tmp_path, FakeWinding(), hand) as (_, screen, pilot):
            await pilot.pause(0.2)
            target = screen.query_one(HandTarget)
            assert target.display is (hand is not None)
            if hand is not None:
                assert (target.turn, target.turning) == (4812.25, True)
