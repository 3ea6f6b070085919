"""The contact is zeroed by keys: asked for in the check list, led through on the run screen, then told."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest
from textual.pilot import Pilot
from textual.widgets import Input, Static

from tests.cli.recipes import to_turns
from tests.tui.fakes import SNAPSHOT, FakeWinding
from tests.tui.test_coil_by_keys import press, shown, until
from tests.tui.test_wind_screen import at_the_coil
from windctl.book.open import open_book
from windctl.desk.asked import Shared
from windctl.plan.make import make_plan
from windctl.profile.builtin import VIRTUAL
from windctl.profile.model import MachineProfile
from windctl.recipe.load import load_recipe
from windctl.record.events import ContactZeroed, GoGiven, ReadingTaken, WentOn
from windctl.run.requests import Request, Skip, Together, ZeroContact
from windctl.run.zero_seen import ZeroSeen
from windctl.tui.app import WindctlApp
from windctl.tui.before_words import First, checklist, first_of
from windctl.tui.screens.before import BeforeScreen
from windctl.tui.screens.recipes import RecipesScreen
from windctl.tui.screens.wind import WindScreen
from windctl.tui.session import Session
from windctl.tui.view import next_of
from windctl.tui.widgets.checklist import Checklist
from windctl.tui.widgets.news import News

CHECKS = VIRTUAL.model_copy(
    update={"readings": VIRTUAL.readings.model_copy(update={"mode": "checks", "contact": True})}
)
SEEN = ZeroSeen(
    can=False, wanted=True, together=False, now=1.31, read=0, enough=8, most=3.7, profile=0.5,
    profile_u95=0.59, found=None, found_u95=None, refused="", contact_off=False,
)  # fmt: skip
READY = replace(SEEN, can=True, wanted=False)
ASKED = replace(
    SNAPSHOT, phase="setting up", turns=0.0, asks="leads", drives_off=True, begun=False, zero=SEEN,
    ohm_now=None, ohm_20c_now=None, says="put the contact and the meter's other lead together",
)  # fmt: skip


def test_the_list_is_one_in_the_order_in_which_it_is_done(tmp_path: Path) -> None:
    recipe = load_recipe(to_turns(tmp_path, 60))
    items = checklist(recipe, VIRTUAL, False, First(zero=True, dry_pass=True))
    firsts = [item.split()[0] for item in items]
    assert firsts == [
        "bobbin",
        "start",
        "wire:",
        "guide",
        "meter",
        "contact",
        "dry",
        "guard",
        "eye",
        "hardware",
    ]
    assert items[4] == "meter leads on, contact off the wire until it is zeroed"
    assert items[5:7] == ("contact zeroed: yes (Z)", "dry pass of guide: yes (P)")
    without = checklist(recipe, VIRTUAL, False, First())
    assert without[4:7] == (
        "meter leads on, contact touches the wire",
        "contact zeroed: no (Z)",
        "dry pass of guide: no (P)",
    )
    counted = VIRTUAL.model_copy(update={"readings": VIRTUAL.readings.model_copy(update={"mode": "none"})})
    assert not any("contact" in item for item in checklist(recipe, counted, False, First()))


@pytest.mark.parametrize(
    ("profile", "turns", "simulated", "zero"),
    [
        (CHECKS, 400, False, True),  # some 260 ohm: leads of 0.3 ohm are 0.1 % of it
        (CHECKS, 8000, False, False),
        (VIRTUAL, 400, False, False),  # live: the first turns tell the leads
        (CHECKS, 400, True, False),
    ],
    ids=["small, stopped", "large, stopped", "live", "simulated"],
)
def test_where_leads_show_a_real_machine_begins_with_it(
    tmp_path: Path, profile: MachineProfile, turns: int, simulated: bool, zero: bool
) -> None:
    plan = make_plan(load_recipe(to_turns(tmp_path, turns)), profile)
    assert first_of(plan, profile, simulated).zero is zero


async def to_the_list(app: WindctlApp, pilot: Pilot[int]) -> BeforeScreen:
    room = app.screen
    assert isinstance(room, RecipesScreen)
    await until(pilot, lambda: room.chosen is not None)
    await press(pilot, "enter")
    await until(pilot, lambda: isinstance(app.screen, BeforeScreen))
    before = app.screen
    assert isinstance(before, BeforeScreen)
    return before


async def test_by_keys_the_whole_step_on_the_simulated_machine(tmp_path: Path) -> None:
    """Z and S, then Y; the simulated hand puts the leads together and the contact back; G and go."""
    to_turns(tmp_path, 60)
    app = WindctlApp(Session(Shared(machine="virtual", speed=0.0, book=tmp_path / "a.book"), [tmp_path]))
    async with app.run_test(size=(80, 24)) as pilot:
        before = await to_the_list(app, pilot)
        assert not before.first.zero
        await press(pilot, "z")
        listed = before.query_one(Checklist)
        await until(pilot, lambda: "contact zeroed: yes (Z)" in listed.items)
        for _ in listed.items:
            await press(pilot, "enter")
        assert "Then there: contact zeroed." in str(before.query_one("#before-state", Static).content)
        await press(pilot, "s")
        await until(pilot, lambda: isinstance(app.screen, WindScreen))
        wind = app.screen
        assert isinstance(wind, WindScreen)
        await until(pilot, lambda: wind.latest is not None and wind.latest.asks == "leads")
        await until(pilot, lambda: wind.glance is not None and "Ω now" in dict(wind.glance.rows)["leads"])
        assert "0.50 ± 0.59 Ω" in shown(app)  # what the profile says
        await press(pilot, "y")
        await until(pilot, lambda: wind.latest is not None and wind.latest.asks == "go")
        await until(pilot, lambda: wind.glance is not None and "zeroed" in dict(wind.glance.rows)["leads"])
        assert wind.latest is not None and wind.latest.turns == 0
        assert next_of(wind.latest).words.startswith("put the contact back on the wire")
        await press(pilot, "z")  # once more
        await until(pilot, lambda: wind.latest is not None and wind.latest.asks == "leads")
        await press(pilot, "y")
        await until(pilot, lambda: wind.latest is not None and wind.latest.asks == "go")
        await press(pilot, "g")
        await until(pilot, lambda: isinstance(app.focused, Input))
        await press(pilot, "g", "o", "enter")
        await until(pilot, lambda: wind.outcome is not None)
        assert any("contact zeroed: 0." in what for _, what in wind.query_one(News).lines)
    with open_book(tmp_path / "a.book", create=False, readonly=True) as book:
        assert book.verify().broken == ()
        events = list(book.events(book.list()[0].number))
    kinds = [type(event) for event in events]
    assert kinds.count(ContactZeroed) == 2
    assert kinds.index(GoGiven) > max(at for at, kind in enumerate(kinds) if kind is ContactZeroed)
    turned = kinds.index(WentOn)
    read = [event.reading.value for event in events[turned:] if isinstance(event, ReadingTaken)]
    assert read[-1] > 20 * read[0] / 3  # of the wire again, which grows


@pytest.mark.parametrize(
    ("zero", "keys", "meant"),
    [
        (READY, "z", [ZeroContact("operator")]),
        (READY, "y", []),
        (SEEN, "y", [Together("operator")]),
        (SEEN, "z", []),
        (SEEN, "tskip", [Skip("operator")]),
        (READY, "tzero", [ZeroContact("operator")]),
        (None, "z", []),
    ],
)
async def test_a_key_means_it_only_where_it_can(
    tmp_path: Path, zero: ZeroSeen | None, keys: str, meant: list[Request]
) -> None:
    asks = "leads" if zero is SEEN else "go"
    winding = FakeWinding(replace(ASKED, zero=zero, asks=asks))
    async with at_the_coil(tmp_path, winding) as (_, _, pilot):
        await pilot.pause(0.2)
        await pilot.press(keys[0])
        if keys[1:]:
            await pilot.press(*keys[1:], "enter")
        assert winding.requests == meant


def leads_row(wind: WindScreen) -> Callable[[], bool]:
    return lambda: wind.glance is not None and dict(wind.glance.rows).get("leads") == "open"


async def test_a_refusal_stands_there_with_what_to_do_and_the_bell_rings_when_it_is_read(
    tmp_path: Path,
) -> None:
    winding = FakeWinding(ASKED)
    async with at_the_coil(tmp_path, winding) as (app, screen, pilot):
        rung: list[bool] = []
        app.bell = lambda: rung.append(True)  # type: ignore[method-assign]  # to hear it
        why = "213.4 ohm were read, and by the profile leads and contact have 3.7 ohm at the most"
        winding.change(asks=None, zero=replace(SEEN, together=True, read=5))
        await pilot.pause(0.3)
        assert next_of(winding.snapshot).figure == "5/8"
        assert rung == []
        winding.change(asks="leads", zero=replace(SEEN, refused=why, now=float("inf")))
        await until(pilot, leads_row(screen))
        assert rung == [True]
        assert "213.4 ohm were read" in str(screen.query_one("#alarm", Static).content)
