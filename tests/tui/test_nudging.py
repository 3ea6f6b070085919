"""The guide nudged by keys before the first turn: which key leads to which flange, and what is drawn."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest
from textual.widgets import Static

from tests.cli.recipes import to_turns
from tests.tui.fakes import CARD, SNAPSHOT, FakeWinding
from tests.tui.test_before import until
from tests.tui.test_coil_by_keys import press
from tests.tui.test_wind_screen import at_the_coil
from windctl.book.open import open_book
from windctl.desk.asked import Shared
from windctl.record.events import GuideNudged, GuideSeen, WentOn
from windctl.run.guide_look import GuideLook
from windctl.run.requests import Hold, Nudge, Seen
from windctl.tui.app import WindctlApp
from windctl.tui.guide_view import flanges
from windctl.tui.keymap import COARSE_MM, FINE_MM
from windctl.tui.pictures.cells import texts
from windctl.tui.pictures.flanges import Flanges, flanges_picture
from windctl.tui.screens.before import BeforeScreen
from windctl.tui.screens.recipes import RecipesScreen
from windctl.tui.screens.wind import WindScreen
from windctl.tui.session import Session
from windctl.tui.view import Sound, glance, sound
from windctl.tui.widgets.checklist import Checklist
from windctl.tui.widgets.flange_target import FlangeTarget
from windctl.tui.widgets.key_bar import KeyBar

LOOK = GuideLook("far", near=True, shift_mm=0.15, again=False, way_mm=10.4, apart="")
LOOKED_AT = replace(
    SNAPSHOT, phase="ready", asks="look", turns=0.0, begun=False, guide_mm=10.4, guide_look=LOOK,
    says="the guide stands at its far end: is it inside the flange, and free?",
)  # fmt: skip


# ------------------------------------------------------------ the drawing


def drawn(look: GuideLook = LOOK, start_side: str = "motor", size: tuple[int, int] = (80, 18)) -> list[str]:
    seen = flanges(replace(LOOKED_AT, guide_look=look), start_side)  # type: ignore[arg-type]  # one of two words
    assert seen is not None
    return texts(flanges_picture(*size, seen))


def place_of(lines: list[str], text: str) -> int:
    """The column in which `text` begins, of the first row that has it."""
    return next(line.index(text) for line in lines if text in line)


@pytest.mark.parametrize(("start_side", "start_first"), [("motor", True), ("operator", False)])
def test_each_arrow_stands_under_the_flange_that_it_leads_to(start_side: str, start_first: bool) -> None:
    lines = drawn(start_side=start_side)
    assert place_of(lines, "motor") < place_of(lines, "operator")
    assert (place_of(lines, "START FLANGE") < place_of(lines, "FAR FLANGE")) is start_first
    arrows = next(line for line in lines if "←" in line)
    left, right = arrows.split("flange", 1)
    to_left, to_right = ("start", "far") if start_first else ("far", "start")
    assert f"← towards the {to_left} " in left
    assert f"towards the {to_right} flange →" in right
    guide = place_of(lines, "▼")
    assert (guide > 40) is start_first, "at the far end"


def test_the_shift_is_told_in_large_figures_with_its_direction() -> None:
    lines = drawn()
    assert "▶ nudged towards the far flange" in "\n".join(lines)
    assert "◀ nudged towards the far flange" in "\n".join(drawn(start_side="operator"))
    assert "◀ nudged towards the start flange" in "\n".join(drawn(replace(LOOK, shift_mm=-0.5)))
    assert "not nudged" in "\n".join(drawn(replace(LOOK, shift_mm=0.001)))
    large = [line for line in lines if "██" in line[4:-4]]
    assert len(large) >= 5, "five rows high"


@pytest.mark.parametrize(
    "size", [(80, 18), (80, 14), (80, 10), (120, 34), (60, 12), (40, 8), (39, 8), (80, 7)]
)
def test_it_fits_wherever_it_is_drawn(size: tuple[int, int]) -> None:
    lines = drawn(size=size)
    assert len(lines) == size[1]
    assert {len(line) for line in lines} == {size[0]}
    if size[0] >= 60 and size[1] >= 8:
        assert "FAR FLANGE" in "\n".join(lines)
        assert "nudged towards" in "\n".join(lines)


def test_a_place_that_is_not_known_is_not_drawn() -> None:
    lines = texts(flanges_picture(80, 18, Flanges(True, None, "far", 0.0, FINE_MM, COARSE_MM)))
    assert "▼" not in "\n".join(lines)


# ------------------------------------------------------------ what is said


def test_the_band_says_what_to_look_for_and_which_keys() -> None:
    seen = glance(LOOKED_AT, CARD)
    assert "inside the flange" in seen.next.words
    assert seen.next.when == "Y: it is right · ← → nudge it · F8 holds"
    apart = "The ends, as you saw them right, are 0.20 mm further apart"
    assert glance(replace(LOOKED_AT, guide_look=replace(LOOK, apart=apart)), CARD).alarm == apart


def test_the_bell_rings_for_an_end_that_is_reached_and_for_no_nudge() -> None:
    moving = replace(LOOKED_AT, phase="stopping", asks=None)
    on_its_way = replace(moving, guide_look=replace(LOOK, near=False))
    assert sound(on_its_way, LOOKED_AT) is Sound.STANDS
    assert sound(moving, LOOKED_AT) is None


# ------------------------------------------------------------ keys


KEYS = {
    "left": -0.05, "right": 0.05, "shift+left": -0.5, "shift+right": 0.5, "comma": -0.5, "full_stop": 0.5,
}  # fmt: skip


@pytest.mark.parametrize("start_side", ["motor", "operator"])
async def test_a_key_moves_the_guide_the_way_it_points(tmp_path: Path, start_side: str) -> None:
    """To the right as it is drawn, the motor on the left: towards the far flange where the start is there."""
    winding = FakeWinding(LOOKED_AT)
    async with at_the_coil(tmp_path, winding) as (_, screen, pilot):
        screen.coil.start_side = start_side  # type: ignore[assignment]  # one of two words
        screen.look()
        assert screen.query_one(FlangeTarget).display
        assert not screen.query_one("#wind-body").display
        await pilot.press(*KEYS, "y")
    sign = 1 if start_side == "motor" else -1
    assert winding.requests == [*(Nudge("operator", sign * mm) for mm in KEYS.values()), Seen("operator")]


async def test_the_keys_are_there_only_while_the_guide_is_looked_at(tmp_path: Path) -> None:
    winding = FakeWinding()
    async with at_the_coil(tmp_path, winding) as (_, screen, pilot):
        await pilot.press("left", "shift+right", "y")
        assert winding.requests == []
        assert "nudge(-0.05)" not in {active.binding.action for active in screen.active_bindings.values()}
        winding.change(asks="look", guide_look=LOOK, phase="ready", turns=0.0)
        screen.look()
        await pilot.pause()
        shown = {active.binding.action for active in screen.active_bindings.values()}
        assert {"nudge(-0.05)", "nudge(0.05)", "nudge(-0.5)", "nudge(0.5)"} <= shown
        assert not {"slower", "go", "end"} & shown
        (bar,) = texts(screen.query_one(KeyBar).drawn(80, 1))
        assert "Y It is right  ← 0.05 mm  → 0.05 mm  , 0.5 mm  . 0.5 mm" in bar


@pytest.mark.parametrize("key", ["f8", "space"])
async def test_f8_and_space_hold_while_the_guide_is_shown(tmp_path: Path, key: str) -> None:
    winding = FakeWinding(LOOKED_AT)
    async with at_the_coil(tmp_path, winding) as (_, _, pilot):
        await pilot.press(key)
        assert winding.requests == [Hold("operator", "the hold key")]


async def test_the_same_refusal_is_said_once_while_a_key_is_held_down(tmp_path: Path) -> None:
    winding = FakeWinding(LOOKED_AT)
    async with at_the_coil(tmp_path, winding) as (app, screen, pilot):
        for n in range(1, 6):
            winding.change(answers=n, answer="that would be 3.05 mm from where the guide was put")
            screen.look()
            await pilot.pause()
        assert len(app._notifications) == 1


async def test_both_flanges_are_taught_by_keys_alone(tmp_path: Path) -> None:
    """On the simulated machine: the far end a step out, the start two steps in, and seen again."""
    to_turns(tmp_path, 60)
    app = WindctlApp(Session(Shared(machine="virtual", speed=0.0, book=tmp_path / "a.book"), [tmp_path]))
    async with app.run_test(size=(80, 24)) as pilot:
        room = app.screen
        assert isinstance(room, RecipesScreen)
        await until(pilot, lambda: room.chosen is not None)
        await press(pilot, "enter")
        await until(pilot, lambda: isinstance(app.screen, BeforeScreen))
        before = app.screen
        assert isinstance(before, BeforeScreen)
        await press(pilot, "p")
        for _ in before.query_one(Checklist).items:
            await press(pilot, "enter")
        await press(pilot, "s")
        await until(pilot, lambda: isinstance(app.screen, WindScreen))
        wind = app.screen
        assert isinstance(wind, WindScreen)

        def stands(end: str, shift_mm: float) -> bool:
            seen = wind.latest
            look = None if seen is None else seen.guide_look
            return (
                seen is not None
                and look is not None
                and seen.asks == "look"
                and (look.end, round(look.shift_mm, 3)) == (end, shift_mm)
            )

        outwards, inwards = ("right", "left") if wind.coil.start_side == "motor" else ("left", "right")
        await until(pilot, lambda: stands("far", 0.0))
        await press(pilot, outwards)
        await until(pilot, lambda: stands("far", 0.05))
        await press(pilot, "y")
        await until(pilot, lambda: stands("start", 0.05))
        for shift in (0.0, -0.05):
            await press(pilot, inwards)
            await until(pilot, lambda shift=shift: stands("start", shift))  # type: ignore[misc]  # bound at once
        await press(pilot, "y")
        await until(pilot, lambda: stands("far", -0.05))
        assert "0.10 mm further apart" in str(wind.query_one("#alarm", Static).content)
        await press(pilot, "y")
        await until(pilot, lambda: wind.outcome is not None)
    with open_book(tmp_path / "a.book", create=False, readonly=True) as book:
        events = list(book.events(book.list()[0].number))
    assert [event.steps for event in events if isinstance(event, GuideNudged)] == [10, -10, -10]
    assert [event.shift for event in events if isinstance(event, GuideSeen)] == [10, -10, -10]
    assert any(isinstance(event, WentOn) for event in events)
