"""What the rooms between coils share: ways, palette, keys of one's own, help, and how they look."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path

import pytest
from textual.screen import Screen
from textual.widgets import Static

from tests.tui.fakes import StillSession
from tests.tui.test_coils_room import HEAD, curve
from tests.tui.test_machine_room import BOARD, LOOKED, FakeLook
from tests.tui.test_pictures import compare, plain, text_of
from tests.tui.test_spools import STATE
from windctl.book.verify import VerifyReport
from windctl.checkup.step import Result, Verdict
from windctl.desk.machine_look import Looked, MachineLook
from windctl.desk.spools import SpoolState
from windctl.shop.compare import Differing
from windctl.tui.app import WindctlApp
from windctl.tui.dialogs.help import Help
from windctl.tui.keymap import ids
from windctl.tui.pictures.cells import texts
from windctl.tui.records import Told
from windctl.tui.screens import rooms
from windctl.tui.screens.coil import CoilScreen
from windctl.tui.view import Card
from windctl.tui.widgets.key_bar import KeyBar

KEYS = {"coils": "f3", "spools": "f7", "machine": "f9"}
CHECKED = replace(
    LOOKED,
    results=(
        Result("greeting", "Greeting", Verdict.GOOD, "boot 7, queue 128", "what the profile has"),
        Result("line", "Line", Verdict.FAULT, "12 reports in 2 s, 3 damaged frames", "36 to 44, none damaged",
               "look at cable, ground, baud rate"),
        Result("limits", "Limits", Verdict.LEFT_OUT, "not done"),
    ),
    board=replace(BOARD, guard_ok=False, pedal_down=True, low_ok=False),
)  # fmt: skip


class Shop(StillSession):
    """A book and a board that are only played: everywhere a name that looks like markup."""

    def __init__(self, folder: Path) -> None:
        other = replace(HEAD, number="b1-2026-0146", dcr_20c_ohm=5920.0, turns=8010.0, verdict="outside")
        open_one = replace(HEAD, number="b1-2026-0148", outcome="open", turns=None, dcr_20c_ohm=None)
        super().__init__([folder], (open_one, HEAD, other))

    def spools(self) -> tuple[SpoolState, ...]:
        facts = (
            {"kind": "spool_added", "wall_time": "2026-02-03T09:00:00", "by": "demo"},
            {"kind": "spool_weighed", "wall_time": "2026-02-03T09:01:00", "by": "", "grams": 117.0,
             "grams_sd": 0.5},
        )  # fmt: skip
        few = replace(STATE, id="s2", coils_left=1, notes="[red]x[/] (demo)", facts=facts)
        return (STATE, few, replace(STATE, id="s3", left_m=None, coils_left=None))

    def told(self, number: str) -> Told:
        head = next(one for one in self._heads if one.number == number)
        card = Card(
            number, head.recipe, "virtual", "dcr_20c_ohm", 5900.0, 1.0, 8700.0, 8024.0, 5900.0, 90.0, 0.0
        )
        lines = (("0:00", f"{number} begins: {head.recipe}"), ("8:02", "note: [b]smooth[/b]"))
        joined = (
            f"join the finish of {number} to the start of b1-2026-0150; the pair's ends are the start of "
        )
        joined += f"{number} and the finish of b1-2026-0150"
        pair = f"goes with b1-2026-0150: {joined}; hum left -51 dB (-80 to -45)"
        return Told(head, card, curve(0.735 if number == HEAD.number else 0.739), lines, "virtual", pair)

    def differing(self, numbers: Sequence[str]) -> tuple[Differing, ...]:
        return (Differing("recipe.lay.pitch_mm", (0.22, 0.23)), Differing("spool", ("s1", None)))

    def verify(self, number: str) -> VerifyReport:
        return VerifyReport(1, ())

    def open_bench(self) -> MachineLook:
        self.bench = FakeLook(CHECKED)
        return self.bench


async def shown(
    app: WindctlApp, size: tuple[int, int], *keys: str, screen: Screen[None] | None = None
) -> str:
    """A room, once it stands still."""
    async with app.run_test(size=size) as pilot:
        await pilot.pause(0.1)
        if screen is not None:
            await app.push_screen(screen)
        for key in keys:
            await pilot.press(key)
            await pilot.pause(0.1)
        before, now = "", app.export_screenshot(title="windctl")
        while before != now:
            await pilot.pause(0.5)
            before, now = now, app.export_screenshot(title="windctl")
        return plain(now)


@pytest.mark.parametrize("size", [(80, 24), (120, 40)], ids=["80x24", "120x40"])
@pytest.mark.parametrize("room", KEYS)
async def test_a_room_as_it_looks(room: str, size: tuple[int, int], tmp_path: Path) -> None:
    """Dark on the small screen, light on the large one."""
    app = WindctlApp(Shop(tmp_path), light=size[0] > 100)
    picture = await shown(app, size, KEYS[room], "down")
    words = text_of(picture)
    assert "◆ SIMULATED" in words
    expected = {"coils": "[red]x[/]", "spools": "[red]x[/] (demo)", "machine": "PRESSED"}[room]
    assert expected in words
    compare(f"{room}-{size[0]}x{size[1]}-{'light' if size[0] > 100 else 'dark'}", picture)


async def test_coils_beside_each_other_as_they_look(tmp_path: Path) -> None:
    session = Shop(tmp_path)
    room = CoilScreen(session, HEAD.number, ("b1-2026-0146",))
    picture = await shown(WindctlApp(session), (120, 40), "v", screen=room)
    words = text_of(picture)
    assert "✔ the record agrees with its digests" in words
    assert "note: [b]smooth[/b]" in words
    assert "recipe.lay.pitch_mm: A 0.22, B 0.23" in words
    assert "spool: A s1, B –" in words
    compare("coil-120x40-dark", picture)


async def test_without_colour_a_fault_is_a_word_and_a_glyph(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("NO_COLOR", "1")
    picture = await shown(WindctlApp(Shop(tmp_path)), (80, 24), "f9", "down")
    words = text_of(picture)
    for said in ("✖ OPEN", "✖ PRESSED", "▼ down", "✖ fault", "✔ good", "□ to come"):
        assert said in words
    colours = set(re.findall(r"#[0-9a-f]{6}", picture.partition("</style>")[2].lower()))
    colours -= {"#ff5f57", "#febc2e", "#28c840", "#292929", "#c5c8c6"}  # the window around it
    assert {c for c in colours if not c[1:3] == c[3:5] == c[5:7]} == set()


async def test_the_palette_lists_the_rooms_and_their_keys_can_be_others(tmp_path: Path) -> None:
    keys: dict[str, object] = {"spools": "j", "spools.weigh": "z", "machine": "f11"}
    app = WindctlApp(Shop(tmp_path), keys)
    async with app.run_test(size=(80, 24)) as pilot:
        await pilot.pause(0.1)
        titles = [one.title for one in app.get_system_commands(app.screen)]
        assert {"Recipes", "Coils", "Spools", "Machine"} <= set(titles)
        await pilot.press("j")
        assert type(app.screen) is rooms.room_of("spools")
        await pilot.pause(0.3)
        assert "Spools J" in text_of(plain(app.export_screenshot()))
        await pilot.press("f7")
        assert type(app.screen) is rooms.room_of("spools")  # its old key does nothing
        await pilot.press("f11")
        assert type(app.screen) is rooms.room_of("machine")


async def test_every_room_has_help_that_fits(tmp_path: Path) -> None:
    session = Shop(tmp_path)
    app = WindctlApp(session)
    async with app.run_test(size=(80, 24)) as pilot:
        await pilot.pause(0.1)
        for room in (*KEYS, "coil"):
            if room == "coil":
                await app.push_screen(CoilScreen(session, HEAD.number))
            else:
                await pilot.press(KEYS[room])
            about = getattr(app.screen, "ABOUT", "")
            await pilot.press("f1")
            await pilot.pause(0.2)
            assert isinstance(app.screen, Help)
            words = text_of(plain(app.export_screenshot()))
            assert about.split(".")[0][:30] in words
            for said in ("no emergency stop", "F9 machine", "Esc closes"):
                assert said in words, room
            await pilot.press("escape")


async def test_without_a_recipe_it_is_said_how_to_come_by_one(tmp_path: Path) -> None:
    app = WindctlApp(StillSession([tmp_path]))
    async with app.run_test(size=(80, 24)) as pilot:
        words = app.screen.query_one("#preview-cautions", Static)
        for _ in range(200):
            if "windctl recipe new" in str(words.content):
                break
            await pilot.pause(0.02)
        assert "windctl recipe new" in str(words.content)
        assert "Wind it" not in texts(app.screen.query_one(KeyBar).drawn(80, 1))[0]


def test_every_command_of_the_rooms_has_an_id() -> None:
    for name in rooms.ABOUT:
        own = [one for one in rooms.room_of(name).BINDINGS if getattr(one, "id", None)]
        assert len(own) >= 4
        assert {one.id for one in own if not isinstance(one, tuple)} <= set(ids())


def test_a_lost_line_during_a_check_says_what_stops_the_spindle() -> None:
    from windctl.tui import machine_view

    lost = Looked("lost", "the line is lost: unplugged", unconfirmed=True)
    assert "hardware stop" in machine_view.summed_up(lost)
