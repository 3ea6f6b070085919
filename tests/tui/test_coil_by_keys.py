"""A whole coil by keys alone on the simulated machine, with a recipe whose name looks like markup."""

from __future__ import annotations

import asyncio
import gc
import html
import json
import re
import time
import unicodedata
from collections.abc import Callable
from pathlib import Path

import pytest
from textual import events
from textual.pilot import Pilot
from textual.widgets import Input, OptionList, Static

from tests.cli.recipes import to_turns
from windctl.book.open import open_book
from windctl.desk.asked import Shared
from windctl.desk.spool_keeping import NewSpool, keep_new
from windctl.tui.app import WindctlApp
from windctl.tui.dialogs.confirm import Confirm
from windctl.tui.screens.before import BeforeScreen
from windctl.tui.screens.coil import CoilScreen
from windctl.tui.screens.coils import CoilsScreen
from windctl.tui.screens.recipes import RecipesScreen
from windctl.tui.screens.wind import WindScreen
from windctl.tui.session import Session
from windctl.tui.widgets.checklist import Checklist
from windctl.tui.widgets.news import News

NAME = "[red]x[/]"


def recipe(folder: Path, turns: int) -> Path:
    """A short coil with that name."""
    file = to_turns(folder, turns)
    text = file.read_text(encoding="utf-8").replace("demo small coil", NAME)
    file.write_text(text, encoding="utf-8")
    return file


def app_for(folder: Path, speed: float) -> WindctlApp:
    shared = Shared(machine="virtual", speed=speed, book=folder / "a.book", batch="[bold]lot[/]", of=2)
    return WindctlApp(Session(shared, [folder]))


def shown(app: WindctlApp) -> str:
    """The text on the screen."""
    picture = app.export_screenshot()
    return html.unescape(re.sub(r"<[^>]+>", " ", picture.partition("</style>")[2])).replace("\xa0", " ")


async def until(pilot: Pilot[int], what: Callable[[], bool], seconds: float = 90.0) -> None:
    """Let the interface run until something holds."""
    end = time.monotonic() + seconds
    while not what():
        assert time.monotonic() < end, "it did not come to that"
        await pilot.pause(0.02)


async def press(pilot: Pilot[int], *keys: str) -> None:
    """Keys as a terminal sends them. (`pilot.press` waits for an idle processor, which a simulation in the
    same process is not.)"""
    for key in keys:
        name = key
        if len(key) == 1 and not key.isalnum():
            name = unicodedata.name(key).lower().replace(" ", "_").replace("-", "_")
        pilot.app.post_message(events.Key(name, key if len(key) == 1 else None))
        await pilot.pause(0.03)


async def to_the_machine(app: WindctlApp, pilot: Pilot[int]) -> None:
    """From the recipe list to the coil on the machine."""
    room = app.screen
    assert isinstance(room, RecipesScreen)
    await until(pilot, lambda: room.chosen is not None)
    assert NAME in shown(app)
    await press(pilot, "enter")
    await until(pilot, lambda: isinstance(app.screen, BeforeScreen) and bool(app.screen.query(Checklist)))
    checklist = app.screen.query_one(Checklist)
    await press(pilot, "s")
    await pilot.pause()
    assert app.session.run is None  # nothing is opened before everything is confirmed
    for _ in checklist.items:
        await press(pilot, "enter")
    assert checklist.complete
    assert NAME in shown(app)
    await press(pilot, "s")
    await until(pilot, lambda: isinstance(app.screen, WindScreen))


async def test_from_the_recipe_list_to_the_sealed_record(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    recipe(tmp_path, 60)
    app = app_for(tmp_path, 0.0)
    monkeypatch.chdir(tmp_path)
    async with app.run_test(size=(80, 24)) as pilot:
        await to_the_machine(app, pilot)
        wind = app.screen
        assert isinstance(wind, WindScreen)
        await until(pilot, lambda: wind.outcome is not None)
        assert "◆ SIMULATED" in shown(app)
        assert NAME in shown(app)
        assert "within" in shown(app)
        await press(pilot, "enter")
        await until(pilot, lambda: isinstance(app.screen, CoilScreen))
        coil = app.screen
        assert isinstance(coil, CoilScreen)
        await until(pilot, lambda: coil.told is not None)
        await press(pilot, "v")
        answer = coil.query_one("#coil-answer", Static)
        await until(pilot, lambda: "agrees with its digests" in str(answer.content))
        await press(pilot, "x")
        await until(pilot, lambda: "written to" in str(answer.content))
        assert NAME in shown(app)
        await press(pilot, "f3")
        await until(pilot, lambda: isinstance(app.screen, CoilsScreen))
        book_room = app.screen
        assert isinstance(book_room, CoilsScreen)
        await until(pilot, lambda: book_room.page.total == 1)
        await pilot.pause(0.2)
        assert NAME in shown(app)
    number = coil.number
    assert json.loads((tmp_path / f"{number}.json").read_text(encoding="utf-8"))["format"] == 1
    with open_book(tmp_path / "a.book", create=False, readonly=True) as book:
        head = book.find(number)
        assert (head.recipe, head.batch, head.of, head.outcome) == (NAME, "[bold]lot[/]", 2, "finished")
        assert head.turns == 60
        assert book.verify().broken == ()


async def test_the_next_one_the_same_is_planned_from_what_is_left_on_the_spool(tmp_path: Path) -> None:
    recipe(tmp_path, 60)
    app = app_for(tmp_path, 0.0)
    keep_new(app.session.shared, NewSpool("s1", gauge="AWG 42", enamel="grade 1", grams=100.0))
    app.session.take_spool("s1")
    async with app.run_test(size=(80, 24)) as pilot:
        await to_the_machine(app, pilot)
        wind = app.screen
        assert isinstance(wind, WindScreen) and wind.preview is not None
        first = wind.preview
        assert first.supply.wound_m == 0.0
        await until(pilot, lambda: wind.outcome is not None)
        await press(pilot, "n")
        await until(pilot, lambda: isinstance(app.screen, BeforeScreen))
        before = app.screen
        assert isinstance(before, BeforeScreen)
        await until(pilot, lambda: before.preview.supply.wound_coils == 1)
        assert before.preview.supply.wound_m == pytest.approx(first.plan.wire_length_m, rel=0.1)
        left = before.preview.plan.learnt.left  # by what the first has taught of the wire, too
        assert left is not None and left != first.plan.learnt.left
        assert f"{left.metres:.0f}"[-3:] in shown(app)


async def test_held_by_a_key_gone_on_with_by_a_word_noted_and_ended(tmp_path: Path) -> None:
    recipe(tmp_path, 8000)
    app = app_for(tmp_path, 20.0)
    async with app.run_test(size=(80, 24)) as pilot:
        await to_the_machine(app, pilot)
        wind = app.screen
        assert isinstance(wind, WindScreen)
        look = wind.coil.winding.look
        await until(pilot, lambda: look().phase == "turning" and look().turns > 20)
        await press(pilot, "space")
        await until(pilot, lambda: look().asks == "go")
        assert wind.glance is not None
        held = look().turns
        await pilot.pause(0.3)
        assert look().turns == held
        assert "held" in {wind.glance.look.word, look().phase}
        await press(pilot, "g")
        await until(pilot, lambda: isinstance(app.focused, Input))
        await press(pilot, "g", "o", "enter")
        await until(pilot, lambda: look().turns > held + 5)
        await press(pilot, "n")
        await until(pilot, lambda: isinstance(app.focused, Input))
        await press(pilot, *"[b]knot[/b]", "enter")
        await press(pilot, "e")
        await until(pilot, lambda: isinstance(app.screen, Confirm))
        await press(pilot, "y")
        await until(pilot, lambda: wind.outcome is not None)
        assert "note: [b]knot[/b]" in [what for _, what in wind.query_one(News).lines]
    assert wind.outcome is not None
    assert (wind.outcome.summary.outcome, wind.outcome.summary.reason) == ("stopped", "ended by the operator")


async def test_left_while_turning_it_is_held_and_said_first_at_the_next_start(
    tmp_path: Path,
) -> None:
    recipe(tmp_path, 8000)
    app = app_for(tmp_path, 20.0)
    async with app.run_test(size=(80, 24)) as pilot:
        await to_the_machine(app, pilot)
        run = app.session.run
        assert run is not None
        assert gc.get_freeze_count() > 10_000  # what was there before is not looked through while it turns
        await until(pilot, lambda: run.winding.look().turns > 5)
        await press(pilot, "f10")
        await until(pilot, lambda: isinstance(app.screen, Confirm))
        await press(pilot, "y")
        await until(pilot, lambda: app.return_code is not None or not app.is_running)
    assert run.outcome is not None
    assert gc.get_freeze_count() == 0
    assert (run.outcome.left, run.outcome.summary.outcome) == ("held", "open")
    assert f"windctl resume {run.card.number}" in app.farewell

    again = app_for(tmp_path, 0.0)
    async with again.run_test(size=(80, 24)) as pilot:
        room = again.screen
        assert isinstance(room, RecipesScreen)
        await until(pilot, lambda: bool(room.open))
        await pilot.pause()
        assert run.card.number in shown(again)
        await press(pilot, "r")
        await until(pilot, lambda: isinstance(again.screen, Confirm))
        await press(pilot, "y")
        await until(pilot, lambda: isinstance(again.focused, Input) and "At which turn" in shown(again))
        await press(pilot, *"fifty", "enter")  # no figure: asked on
        assert "At which turn" in shown(again)
        turns = run.winding.look().turns
        await press(pilot, *f"{turns:.4f}".replace(".", ","), "enter")
        await until(pilot, lambda: isinstance(again.screen, WindScreen))
        wind = again.screen
        assert isinstance(wind, WindScreen)
        await until(pilot, lambda: wind.coil.winding.look().turns > turns + 50)
        await press(pilot, "l")
        await until(pilot, lambda: isinstance(again.screen, Confirm))
        await press(pilot, "y")
        await until(pilot, lambda: wind.outcome is not None)
    with open_book(tmp_path / "a.book", create=False, readonly=True) as book:
        assert book.count() == 1
        assert book.verify().broken == ()


async def test_a_bad_recipe_says_what_is_wrong_and_goes_nowhere(tmp_path: Path) -> None:
    file = recipe(tmp_path, 60)
    text = file.read_text(encoding="utf-8").replace("pitch_mm = 0.22", "pitch_mm = -1")
    file.write_text(text, encoding="utf-8")
    (tmp_path / "unrelated.toml").write_text("[tool]\nx = 1\n", encoding="utf-8")
    app = app_for(tmp_path, 0.0)
    async with app.run_test(size=(120, 40)) as pilot:
        room = app.screen
        assert isinstance(room, RecipesScreen)
        await until(pilot, lambda: "lay.pitch_mm" in shown(app))
        assert room.query_one(OptionList).option_count == 1
        assert "to_turns.toml:" in shown(app)
        await press(pilot, "enter")
        await pilot.pause()
        assert app.screen is room


async def test_a_terminal_that_is_closed_holds_and_records(tmp_path: Path) -> None:
    """What a signal does: hold at once, then wait for the spindle and the record, from another thread."""
    recipe(tmp_path, 8000)
    app = app_for(tmp_path, 20.0)
    async with app.run_test(size=(80, 24)) as pilot:
        await to_the_machine(app, pilot)
        run = app.session.run
        assert run is not None
        await until(pilot, lambda: run.winding.look().turns > 5)
        assert app.session.hold("interrupted by SIGHUP", leave=True)
        outcome = await asyncio.to_thread(app.session.leave, "interrupted by SIGHUP")
    assert outcome is not None
    assert (outcome.left, outcome.summary.outcome) == ("held", "open")
    with open_book(tmp_path / "a.book", create=False, readonly=True) as book:
        holds = [event for event in book.events(outcome.number) if event.kind == "hold_requested"]
        assert len(holds) == 1
        assert book.verify().broken == ()
