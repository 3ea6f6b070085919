"""How it looks: the run screen and the check list as pictures, compared with the ones kept beside this file.

`WINDCTL_PICTURES=write` makes them anew; look at them before they are kept. The README shows one of them.
"""

from __future__ import annotations

import html
import os
import re
from dataclasses import replace
from pathlib import Path

import pytest
from textual.widgets import Input

from tests.tui.fakes import SNAPSHOT, FakeWinding, StillSession, run_of
from tests.tui.test_by_eye import BY_EYE
from tests.tui.test_nudging import LOOKED_AT
from windctl.run.snapshot import Snapshot
from windctl.tui.app import WindctlApp
from windctl.tui.screens.wind import WindScreen

KEPT = Path(__file__).parent / "pictures"
WRITE = os.environ.get("WINDCTL_PICTURES") == "write"

TRIPPED = {
    "phase": "tripped",
    "says": "the board is tripped (tension low): the wire broke, left its path or ran out",
    "asks": "clear",
    "pace_rpm": 0.0,
    "wire_ends_at": 4790.5,
}


def plain(picture: str) -> str:
    """The picture with the reader's own font in place of one from elsewhere, and no number of the process."""
    picture = re.sub(r"@font-face \{.*?\}\s*", "", picture, flags=re.S)
    picture = picture.replace("Fira Code", "DejaVu Sans Mono")
    picture = re.sub(r"terminal-\d+-", "terminal-", picture)
    return re.sub(r"[ \t]+$", "", picture, flags=re.M)


def text_of(picture: str) -> str:
    """The words in a picture, line breaks and all blanks as one blank."""
    words = html.unescape(re.sub(r"<[^>]+>", " ", picture.partition("</style>")[2]))
    return " ".join(words.replace("\xa0", " ").split())


async def picture_of(
    app: WindctlApp,
    size: tuple[int, int],
    snapshot: Snapshot = SNAPSHOT,
    *,
    has: str = "build&#160;",
    keys: tuple[str, ...] = (),
) -> str:
    """The run screen at one moment, once it `has` that, after these `keys`."""
    winding = FakeWinding(snapshot)
    async with app.run_test(size=size) as pilot:
        run = run_of(winding)
        run.by_eye = snapshot.by_eye
        app.session.run = run
        await app.push_screen(WindScreen(app.session, run))
        await pilot.pause()
        await pilot.press(*keys)
        await pilot.pause()
        for line in app.screen.query(Input):
            line.cursor_blink = False  # else it is there in one picture and not in the next
        before = ""
        while has not in before or before != app.export_screenshot(title="windctl"):
            before = app.export_screenshot(title="windctl")  # until everything is placed and drawn
            await pilot.pause(0.7)
        return plain(before)


def compare(name: str, picture: str) -> None:
    """The same as the kept one, to the last letter."""
    file = KEPT / f"{name}.svg"
    if WRITE:
        file.write_text(picture, encoding="utf-8")
    assert file.exists(), f"there is no picture {name}; WINDCTL_PICTURES=write makes it"
    kept = file.read_text(encoding="utf-8")
    assert picture == kept, f"{name} looks different; WINDCTL_PICTURES=write keeps the new look"


@pytest.mark.parametrize("size", [(80, 24), (120, 40)], ids=["80x24", "120x40"])
@pytest.mark.parametrize("light", [False, True], ids=["dark", "light"])
async def test_the_run_screen(size: tuple[int, int], light: bool, tmp_path: Path) -> None:
    app = WindctlApp(StillSession([tmp_path]), light=light)
    name = f"wind-{size[0]}x{size[1]}-{'light' if light else 'dark'}"
    compare(name, await picture_of(app, size))


async def test_the_run_screen_without_colour(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """With NO_COLOR every shade is a grey, and the state is still there as word and glyph."""
    monkeypatch.setenv("NO_COLOR", "1")
    app = WindctlApp(StillSession([tmp_path]))
    picture = await picture_of(app, (80, 24))
    colours = set(re.findall(r"#[0-9a-f]{6}", picture.partition("</style>")[2].lower()))
    shades = {
        colour for colour in colours if colour not in ("#ff5f57", "#febc2e", "#28c840", "#292929", "#c5c8c6")
    }
    assert len(shades) > 5
    assert {c for c in shades if not c[1:3] == c[3:5] == c[5:7]} == set()
    compare("wind-80x24-no-colour", picture)


async def test_a_trip_is_unmistakable(tmp_path: Path) -> None:
    app = WindctlApp(StillSession([tmp_path]))
    picture = await picture_of(app, (80, 24), replace(SNAPSHOT, **TRIPPED))
    assert "the wire broke" in text_of(picture)
    assert "C clears it" in text_of(picture)
    compare("tripped-80x24-dark", picture)


async def test_a_counter_read_by_eye_is_asked_for(tmp_path: Path) -> None:
    app = WindctlApp(StillSession([tmp_path]))
    waiting = replace(BY_EYE, says="wind to 7 946 and read the counter; slow down at 7 896")
    picture = await picture_of(app, (80, 24), waiting, has="Counter?", keys=("k",))
    assert "wind to 7 946 and read the counter" in text_of(picture)
    compare("counter-80x24-dark", picture)


async def test_the_guide_is_nudged_to_where_it_is_seen_right(tmp_path: Path) -> None:
    app = WindctlApp(StillSession([tmp_path]))
    picture = await picture_of(app, (80, 24), LOOKED_AT, has="nudged")
    assert "START FLANGE" in text_of(picture)
    compare("guide-80x24-dark", picture)


async def test_the_help_fits_the_smallest_screen(tmp_path: Path) -> None:
    app = WindctlApp(StillSession([tmp_path]))
    async with app.run_test(size=(80, 24)) as pilot:
        run = run_of(FakeWinding())
        app.session.run = run
        await app.push_screen(WindScreen(app.session, run))
        await pilot.press("f1")
        await pilot.pause(0.2)
        picture = plain(app.export_screenshot(title="windctl"))
    text = text_of(picture)
    for words in ("The coil on the machine", "the spindle holds", "no emergency stop", "Esc closes", "Tell"):
        assert words in text


def test_the_readme_shows_one_of_these_pictures() -> None:
    readme = (Path(__file__).resolve().parents[2] / "README.md").read_text(encoding="utf-8")
    shown = re.findall(r"!\[[^\]]+\]\((tests/tui/pictures/[^)]+\.svg)\)", readme)
    assert len(shown) == 1
    assert (KEPT / Path(shown[0]).name).exists()


def test_no_kept_picture_reaches_out_of_the_computer() -> None:
    kept = sorted(KEPT.glob("*.svg"))
    assert len(kept) >= 13
    for file in kept:
        text = file.read_text(encoding="utf-8")
        assert re.findall(r"url\(|@import|<image|href", text.replace("url(#", "")) == [], file.name
