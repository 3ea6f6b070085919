"""The bottom row, and that what is drawn goes with its screen."""

from __future__ import annotations

from pathlib import Path

from textual import _styles_cache
from textual.widgets import Static

from tests.tui.fakes import FakeWinding
from tests.tui.test_wind_screen import at_the_coil
from windctl.run.requests import Slower
from windctl.tui.dialogs.help import Help
from windctl.tui.pictures.cells import texts
from windctl.tui.screens.wind import WindScreen
from windctl.tui.widgets.key_bar import KeyBar


def row(screen: WindScreen, width: int) -> str:
    return texts(screen.query_one(KeyBar).drawn(width, 1))[0]


async def test_hold_stands_first_help_last_and_what_has_no_room_is_hinted_at(tmp_path: Path) -> None:
    async with at_the_coil(tmp_path, FakeWinding()) as (_, screen, _pilot):
        wide = row(screen, 200)
        assert wide.split()[:4] == ["F8", "HOLD", "G", "Go"]
        assert wide.rstrip().endswith("F1 Help")
        assert "N Note" in wide and "…" not in wide
        narrow = row(screen, 40)
        assert narrow.split()[:2] == ["F8", "HOLD"]
        assert narrow.rstrip().endswith("F1 Help")
        assert "…" in narrow and "Note" not in narrow
        assert len(narrow) == 40


async def test_a_click_presses_the_key_under_it(tmp_path: Path) -> None:
    winding = FakeWinding()
    async with at_the_coil(tmp_path, winding) as (app, screen, pilot):
        line = row(screen, 80)
        await pilot.click(KeyBar, offset=(line.index("Slower"), 0))
        await pilot.pause()
        assert winding.requests == [Slower("operator")]
        await pilot.click(KeyBar, offset=(line.index("Help"), 0))
        await pilot.pause()
        assert isinstance(app.screen, Help)


async def test_what_a_dialog_drew_goes_with_it(tmp_path: Path) -> None:
    """The library keeps it by a cache of its own: where that is gone, `tui/drawn.py` may go, too."""
    remembered = _styles_cache.StylesCache.get_inner_outer
    async with at_the_coil(tmp_path, FakeWinding()) as (_, screen, pilot):
        sizes = []
        for _ in range(4):
            await pilot.press("n")
            await pilot.pause()
            assert remembered.cache_info().currsize > 0
            await pilot.press("escape")
            await pilot.pause()
            assert screen.query_one("#under", Static).is_attached
            sizes.append(remembered.cache_info().currsize)
        assert max(sizes[1:]) <= sizes[0] + 2
