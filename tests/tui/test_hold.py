"""The hold key: on every screen, in every dialog, in every input; nothing can take it away."""

from __future__ import annotations

from collections.abc import Awaitable, Callable
from pathlib import Path

import pytest
from textual.pilot import Pilot
from textual.widgets import Input

from tests.tui.fakes import FakeWinding, StillSession, run_of
from windctl.run.requests import Hold
from windctl.tui.app import WindctlApp
from windctl.tui.dialogs.choose import Choose
from windctl.tui.dialogs.confirm import Confirm
from windctl.tui.dialogs.typed import Typed
from windctl.tui.keymap import checked, ids
from windctl.tui.screens.coil import CoilScreen
from windctl.tui.screens.machine import MachineScreen
from windctl.tui.screens.spools import SpoolsScreen
from windctl.tui.screens.wind import WindScreen

Opening = Callable[[Pilot[int]], Awaitable[None]]


async def nothing(pilot: Pilot[int]) -> None:
    """The run screen itself."""


async def note(pilot: Pilot[int]) -> None:
    await pilot.press("n")
    assert isinstance(pilot.app.focused, Input)


async def tell(pilot: Pilot[int]) -> None:
    await pilot.press("t")
    assert isinstance(pilot.app.focused, Input)


async def end(pilot: Pilot[int]) -> None:
    await pilot.press("e")
    assert isinstance(pilot.app.screen, Confirm)


async def leave(pilot: Pilot[int]) -> None:
    await pilot.press("f10")
    assert isinstance(pilot.app.screen, Confirm)


async def help_(pilot: Pilot[int]) -> None:
    await pilot.press("f1")


async def palette(pilot: Pilot[int]) -> None:
    await pilot.press("f4")
    assert isinstance(pilot.app.focused, Input)


async def coils(pilot: Pilot[int]) -> None:
    await pilot.press("f3")


async def coil(pilot: Pilot[int]) -> None:
    app = pilot.app
    assert isinstance(app, WindctlApp)
    await app.push_screen(CoilScreen(app.session, "b1-2026-0001"))


async def finding(pilot: Pilot[int]) -> None:
    await pilot.press("f3", "slash")
    assert isinstance(pilot.app.focused, Input)


async def spools(pilot: Pilot[int]) -> None:
    await pilot.press("f7")
    assert isinstance(pilot.app.screen, SpoolsScreen)


async def new_spool(pilot: Pilot[int]) -> None:
    await pilot.press("f7", "a")
    assert isinstance(pilot.app.focused, Input)


async def machine(pilot: Pilot[int]) -> None:
    await pilot.press("f9")
    assert isinstance(pilot.app.screen, MachineScreen)


async def machines(pilot: Pilot[int]) -> None:
    await pilot.press("f9", "m")
    assert isinstance(pilot.app.screen, Choose)


EVERYWHERE = [nothing, note, tell, end, leave, help_, palette, coils, coil]
EVERYWHERE += [finding, spools, new_spool, machine, machines]


async def started(app: WindctlApp, pilot: Pilot[int], winding: FakeWinding) -> None:
    """The run screen with a run that turns."""
    run = run_of(winding)
    app.session.run = run
    await app.push_screen(WindScreen(app.session, run))
    await pilot.pause()


@pytest.mark.parametrize("opening", EVERYWHERE, ids=lambda one: one.__name__)
async def test_f8_holds_everywhere(opening: Opening, tmp_path: Path) -> None:
    app, winding = WindctlApp(StillSession([tmp_path])), FakeWinding()
    async with app.run_test(size=(80, 24)) as pilot:
        await started(app, pilot, winding)
        await opening(pilot)
        await pilot.pause()
        winding.requests.clear()
        await pilot.press("f8")
        assert winding.requests == [Hold("operator", "the hold key")]


@pytest.mark.parametrize(
    "opening", [nothing, end, help_, coils, coil, spools, machines], ids=lambda one: one.__name__
)
async def test_space_holds_while_it_turns_and_nothing_is_typed(opening: Opening, tmp_path: Path) -> None:
    app, winding = WindctlApp(StillSession([tmp_path])), FakeWinding()
    async with app.run_test(size=(80, 24)) as pilot:
        await started(app, pilot, winding)
        await opening(pilot)
        await pilot.pause()
        await pilot.press("space")
        assert winding.requests == [Hold("operator", "the hold key")]


async def test_space_is_a_space_where_something_is_typed(tmp_path: Path) -> None:
    app, winding = WindctlApp(StillSession([tmp_path])), FakeWinding()
    async with app.run_test(size=(80, 24)) as pilot:
        await started(app, pilot, winding)
        await note(pilot)
        await pilot.press("a", "space", "b")
        assert app.screen.query_one(Input).value == "a b"
        assert winding.requests == []


async def test_space_does_not_hold_what_stands(tmp_path: Path) -> None:
    app, winding = WindctlApp(StillSession([tmp_path])), FakeWinding()
    winding.change(phase="held", asks="go")
    async with app.run_test(size=(80, 24)) as pilot:
        await started(app, pilot, winding)
        await pilot.press("space")
        assert winding.requests == []


@pytest.mark.parametrize("name", ids())
def test_no_command_can_be_put_on_the_hold_keys(name: str) -> None:
    for keys in ("f8", "space", "x,f8", "x, space"):
        good, wrong = checked({name: keys})
        assert good == {}
        assert len(wrong) == 1


async def test_f8_still_holds_with_every_key_remapped(tmp_path: Path) -> None:
    keys: dict[str, object] = dict.fromkeys(ids(), "f8")
    app, winding = WindctlApp(StillSession([tmp_path]), keys), FakeWinding()
    async with app.run_test(size=(80, 24)) as pilot:
        await started(app, pilot, winding)
        await pilot.press("f8")
        assert winding.requests == [Hold("operator", "the hold key")]


async def test_the_key_acts_in_the_terminals_own_thread_while_the_screen_hangs(tmp_path: Path) -> None:
    """A driver that hears the key while the interface's loop is busy holds without waiting for it."""
    from textual import events
    from textual.drivers.headless_driver import HeadlessDriver

    from windctl.tui.urgent import Held, with_urgent_keys

    app, winding = WindctlApp(StillSession([tmp_path])), FakeWinding()
    app.session.run = run_of(winding)
    passed_on: list[object] = []

    class Deaf(HeadlessDriver):
        def send_message(self, message: object) -> None:
            passed_on.append(message)

    async with app.run_test(size=(80, 24)):
        driver = with_urgent_keys(Deaf)(app)
        driver.process_message(events.Key("f8", None))
        assert winding.requests == [Hold("operator", "the hold key")]
        driver.process_message(events.Key("space", " "))
        assert len(winding.requests) == 2
        driver.process_message(events.Key("x", "x"))
        assert len(winding.requests) == 2
    assert [type(one) for one in passed_on] == [Held, Held, events.Key]


async def test_leaving_while_it_turns_asks_and_no_means_no(tmp_path: Path) -> None:
    app, winding = WindctlApp(StillSession([tmp_path])), FakeWinding()
    async with app.run_test(size=(80, 24)) as pilot:
        await started(app, pilot, winding)
        await pilot.press("f10")
        question = app.screen
        assert isinstance(question, Confirm)
        assert "The coil turns. It will be held first." in question.words
        await pilot.press("n")
        assert winding.requests == []
        assert isinstance(app.screen, WindScreen)


async def test_a_go_is_a_typed_word(tmp_path: Path) -> None:
    from windctl.run.requests import Go

    app, winding = WindctlApp(StillSession([tmp_path])), FakeWinding()
    winding.change(phase="held", asks="go", virtual=False)
    async with app.run_test(size=(80, 24)) as pilot:
        await started(app, pilot, winding)
        await pilot.press("g")
        question = app.screen
        assert isinstance(question, Typed)
        assert "eye protection" in question.words
        await pilot.press("enter", "y", "enter")
        assert winding.requests == []
        await pilot.press("g", "o", "enter")
        assert winding.requests == [Go("operator")]
