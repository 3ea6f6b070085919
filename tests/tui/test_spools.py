"""The spools room: what is known in words and bars, forms that say what is wrong, and taking a spool."""

from __future__ import annotations

import asyncio
from dataclasses import replace
from pathlib import Path

import pytest
from textual.pilot import Pilot
from textual.widgets import Input, Static

from windctl.desk.asked import Shared
from windctl.desk.spool_keeping import NewSpool, keep_new
from windctl.desk.spools import SpoolState
from windctl.errors import UsageError
from windctl.tui import spool_forms, spool_view
from windctl.tui.app import WindctlApp
from windctl.tui.dialogs.form import Form
from windctl.tui.pictures.cells import texts
from windctl.tui.pictures.known import known_picture
from windctl.tui.screens.recipes import RecipesScreen
from windctl.tui.screens.spools import SpoolsScreen
from windctl.tui.session import Session

STATE = SpoolState(
    id="s1", wire="AWG 42, grade 1", insulation="", notes="", nominal_ohm_per_m=5.472,
    nominal_ohm_per_m_sd=0.22, ohm_per_m=5.527, ohm_per_m_sd=0.01, coils=3, taught_by=2, pieces=0,
    left_m=4000.0, left_sd_m=50.0, metres_each=1000.0, coils_left=3, unfit=(), withdrawn=(), facts=(),
    coil_each="b1-2026-0147",
)  # fmt: skip
NOTHING = dict.fromkeys((field.key for field in spool_forms.NEW), "")


def test_how_long_it_lasts_is_a_word_a_glyph_and_a_role() -> None:
    looks = [
        spool_view.stock(STATE),
        spool_view.stock(replace(STATE, coils_left=2)),
        spool_view.stock(replace(STATE, coils_left=0)),
        spool_view.stock(replace(STATE, left_m=None, coils_left=None)),
    ]
    assert [look.word for look in looks] == ["3 coils", "2 coils", "no coil", "not weighed"]
    assert len({look.glyph for look in looks}) == 4
    assert [look.role for look in looks] == ["good", "unsure", "bad", "unsure"]


def test_the_bars_stand_where_the_figures_say() -> None:
    """1 % above the table in an interval of a tenth of the table's."""
    rows = texts(known_picture(67, 3, 0.1, 0.01, 0.01))
    table, now = rows[0], rows[1]
    assert table.count("◆") == now.count("◆") == 1
    wide, narrow = table.rindex("┫") - table.index("┣"), now.rindex("┫") - now.index("┣")
    assert wide == pytest.approx(10 * narrow, rel=0.15)
    assert now.index("┣") == pytest.approx(table.index("◆"), abs=1)


@pytest.mark.parametrize(
    ("typed", "meant"),
    [
        ({"wire": "AWG 42", "enamel": "grade 1"}, NewSpool(gauge="AWG 42", enamel="grade 1")),
        ({"wire": "awg 42", "enamel": "2"}, NewSpool(gauge="AWG 42", enamel="grade 2")),
        ({"wire": "0,063", "enamel": "0,072"}, NewSpool(diameter_mm=0.063, overall_mm=0.072)),
        (
            {"name": "a-7", "wire": "AWG 42", "enamel": "1", "grams": "250", "ohm_per_m": "5,5"},
            NewSpool("a-7", gauge="AWG 42", enamel="grade 1", grams=250.0, ohm_per_m=5.5),
        ),
    ],
)
def test_what_is_typed_means_a_spool(typed: dict[str, str], meant: NewSpool) -> None:
    assert spool_forms.new_spool({**NOTHING, **typed}) == meant


@pytest.mark.parametrize(
    ("typed", "words"),
    [
        ({}, "which wire"),
        ({"wire": "AWG 42"}, "how thick is its enamel"),
        ({"wire": "42", "enamel": "1"}, "not within 0.01 to 1 mm"),
        ({"wire": "AWG 99", "enamel": "1"}, "no such wire"),
        ({"wire": "AWG 42", "enamel": "thin"}, "not a number of mm"),
        ({"wire": "AWG 42", "enamel": "1", "grams": "nan"}, "wire on it"),
        ({"wire": "AWG 42", "enamel": "1", "ohm_per_m": "9"}, "about 5.47 ohm per metre"),
        ({"wire": "AWG 42", "enamel": "1", "name": "a b"}, "cannot be a spool's name"),
    ],
)
def test_what_is_no_spool_is_said(typed: dict[str, str], words: str) -> None:
    with pytest.raises(UsageError, match=words):
        spool_forms.new_spool({**NOTHING, **typed})


def app_for(folder: Path) -> WindctlApp:
    return WindctlApp(Session(Shared(machine="virtual", book=folder / "a.book"), [folder]))


async def room_of(app: WindctlApp, pilot: Pilot[int]) -> SpoolsScreen:
    """The spools room, once it has looked."""
    await pilot.press("f7")
    room = app.screen
    assert isinstance(room, SpoolsScreen)
    await until(pilot, lambda: room.looked)
    return room


async def until(pilot: Pilot[int], what: object) -> None:
    for _ in range(200):
        if callable(what) and what():
            return
        await pilot.pause(0.02)
    raise AssertionError("it did not come to that")


async def typed(pilot: Pilot[int], *lines: str) -> None:
    """Lines of a form, one after the other."""
    for line in lines:
        field = pilot.app.focused
        assert isinstance(field, Input)
        field.value = line
        await pilot.press("enter")


async def test_a_spool_is_kept_weighed_measured_and_taken_by_keys(tmp_path: Path) -> None:
    """250 g of AWG 42 is 8.55 km, by area and density of copper and enamel, as `windctl spool` has it."""
    app = app_for(tmp_path)
    async with app.run_test(size=(80, 24)) as pilot:
        room = await room_of(app, pilot)
        assert "A keeps one" in str(room.query_one("#spools-foot", Static).content)
        await pilot.press("a")
        await typed(pilot, "attic-7", "AWG 42", "", "[b]poly[/]", "250", "", "[red]x[/]")
        form = app.screen
        assert isinstance(form, Form)
        assert "how thick is its enamel" in str(form.query_one("#form-problem", Static).content)
        form.query_one("#field-enamel", Input).value = "grade 1"
        await pilot.press("enter")
        await until(pilot, lambda: bool(room.spools))
        (spool,) = room.spools
        assert (spool.id, spool.notes, spool.insulation) == ("attic-7", "[red]x[/]", "[b]poly[/]")
        assert spool.left_m == pytest.approx(8550, rel=0.02)
        picture = app.export_screenshot()
        assert "[red]x[/]" in picture
        assert "[b]poly[/]" in picture

        await pilot.press("g")
        await typed(pilot, "100")
        await until(pilot, lambda: room.spools[0].left_m is not None and room.spools[0].left_m < 4000)
        await pilot.press("m")
        await typed(pilot, "2", "10,94", "20")
        await until(pilot, lambda: room.spools[0].pieces == 1)

        assert app.session.spool is None
        await pilot.press("enter")
        assert app.session.spool == "attic-7"
        assert "▶ next" in app.export_screenshot().replace("&#160;", " ")
        await pilot.press("f2")
        assert isinstance(app.screen, RecipesScreen)


async def test_what_the_book_refuses_comes_back_into_the_form(tmp_path: Path) -> None:
    app = app_for(tmp_path)
    keep_new(app.session.shared, NewSpool("s1", gauge="AWG 42", enamel="grade 1"))
    async with app.run_test(size=(80, 24)) as pilot:
        await room_of(app, pilot)
        await pilot.press("a")
        await typed(pilot, "s1", "AWG 43", "grade 1", "", "", "", "second")
        await until(pilot, lambda: isinstance(app.screen, Form))
        await asyncio.sleep(0)
        form = app.screen
        assert isinstance(form, Form)
        await until(pilot, lambda: bool(form.query("#form-problem")))
        assert "is in the coil book" in str(form.query_one("#form-problem", Static).content)
        assert form.values["notes"] == "second"
