"""What has little room: whole entries, figures on every axis, and a sign where something is cut."""

from __future__ import annotations

from dataclasses import replace

import pytest
from textual.command import CommandPalette
from textual.widgets import Input

from tests.tui.fakes import SNAPSHOT, FakeWinding, StillSession, run_of
from tests.tui.test_coil_by_keys import until
from windctl.tui.app import WindctlApp
from windctl.tui.dialogs.help import Help
from windctl.tui.pictures.cells import texts
from windctl.tui.pictures.curve import Scale, curve_picture
from windctl.tui.screens.wind import WindScreen
from windctl.tui.widgets.figures import Figures
from windctl.tui.widgets.key_bar import KeyBar
from windctl.tui.widgets.news import News


def news(lines: list[tuple[str, str]], width: int, height: int) -> list[str]:
    """As it is drawn."""
    widget = News()
    widget.lines = tuple(lines)
    return [row.rstrip() for row in texts(widget.drawn(width, height))]


def test_the_news_begin_with_a_whole_entry() -> None:
    lines = [("0:00", "a dry pass of the guide is to come first"), ("0:01", "the board answers, at turn 0")]
    assert news(lines, 28, 3) == [" 0:01  the board answers, at", "       turn 0", ""]
    assert news(lines, 28, 5)[0] == " 0:00  a dry pass of the"


def test_one_long_entry_is_shown_as_far_as_it_goes() -> None:
    assert news([("0:00", "one two three four five")], 16, 2) == [" 0:00  one two", "       three"]


def test_an_hour_does_not_run_into_what_happened() -> None:
    drawn = news([("59:59", "turns from 0"), ("1:11:24", "go, given by you")], 32, 2)
    assert drawn == ["  59:59  turns from 0", "1:11:24  go, given by you"]


@pytest.mark.parametrize("turns", [1.0, 40.0, 150.0, 2900.0, 6000.0, 7600.0, 10_000.0, 49_000.0])
@pytest.mark.parametrize("width", [36, 39, 44, 63])
def test_every_axis_of_turns_has_a_figure(turns: float, width: int) -> None:
    scale = Scale(turns, 6000.0, 5500.0, 0.1)
    axis = texts(curve_picture(width, 9, scale, (), ()))[-1]
    assert any(letter.isdecimal() for letter in axis), axis
    assert axis.endswith(" turns")


def test_a_figure_that_is_cut_says_so() -> None:
    drawn = texts(Figures([("outcome", "finished: stopped where"), ("turns", "8 030")]).drawn(24, 2))
    assert drawn[0] == "outcome  finished: stop…"
    assert drawn[1].rstrip() == "turns    8 030"


@pytest.mark.parametrize("driven", [True, False])
async def test_no_pace_is_offered_of_somebodys_own_motor(driven: bool) -> None:
    app = WindctlApp(StillSession([]))
    async with app.run_test(size=(120, 40)) as pilot:
        run = run_of(FakeWinding(replace(SNAPSHOT, driven=driven)))
        app.session.run = run
        await app.push_screen(WindScreen(app.session, run))
        await pilot.pause(0.2)
        offered = "".join(texts(app.screen.query_one(KeyBar).drawn(120, 1)))
    assert ("Slower" in offered, "Faster" in offered) == (driven, driven)
    assert "HOLD" in offered


async def test_all_commands_are_asked_for_in_our_words_and_without_a_wide_sign() -> None:
    app = WindctlApp(StillSession([]))
    async with app.run_test(size=(80, 24)) as pilot:
        await pilot.press("f4")
        await until(pilot, lambda: isinstance(app.screen, CommandPalette) and bool(app.screen.query(Input)))
        assert app.screen.query_one(Input).placeholder == "what is to be done"
        assert not any(icon.display for icon in app.screen.query("SearchIcon"))


async def test_the_help_writes_keys_as_they_stand_on_the_keyboard(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr("windctl.tui.screens.wind.shown_near", lambda snapshot: True)
    app = WindctlApp(StillSession([]))
    async with app.run_test(size=(80, 24)):
        run = run_of(FakeWinding())
        app.session.run = run
        await app.push_screen(WindScreen(app.session, run))
        words = Help(app.screen).words
    assert "Full_stop" not in words and "Shift+left" not in words
    table = words.split("\n\n")[1].splitlines()
    second = {len(row[:34].rstrip()) < 34 and row[34] != " " for row in table if len(row) > 34}
    assert second == {True}  # both columns begin where they should
    assert any(row.startswith("←      ") for row in table)
