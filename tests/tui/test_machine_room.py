"""The machine room: states in words, glyphs and roles; nothing powered without a typed go; F8 in it."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest
from textual.pilot import Pilot
from textual.widgets import Input, Static

from windctl.checkup.step import Result, Verdict
from windctl.desk.asked import Shared
from windctl.desk.board_seen import BoardSeen
from windctl.desk.machine_look import Asked, Looked, MachineLook, steps_seen
from windctl.profile.load import load_profile
from windctl.tui import machine_view
from windctl.tui.app import WindctlApp
from windctl.tui.dialogs.confirm import Confirm
from windctl.tui.looks import INPUTS, STEPS
from windctl.tui.screens.coils import CoilsScreen
from windctl.tui.screens.machine import MachineScreen
from windctl.tui.screens.recipes import RecipesScreen
from windctl.tui.session import Session

BOARD = BoardSeen(
    state="drives off", because="switched on", look_to="", count=4000, turns=10.0, count_known=True,
    guide_mm=-1.5, guide_known=False, stop_ok=True, guard_ok=True, pedal_down=None, low_ok=True, high_ok=True,
    standing=True, index=True, rpm=0.0, tension_cn=12.3, contact=True, contact_ohm=0.9, contact_open=False,
    celsius=21.5, bad_frames=0, boot=7,
)  # fmt: skip
LOOKED = Looked("live", board=BOARD, steps=steps_seen())
CONSENT = Asked("The next steps power the drives.\nType go and Enter.", typed=True, consent=True)


class FakeLook(MachineLook):
    """Shows what it was told to show, and keeps what it is asked."""

    def __init__(self, looked: Looked = LOOKED) -> None:
        self.shown = looked
        self.asked: list[object] = []

    def look(self) -> Looked:
        return self.shown

    def check(self, keys: tuple[str, ...] = (), *, powered: bool = True) -> None:
        self.asked.append(("check", keys, powered))

    def answer(self, line: str) -> None:
        self.asked.append(line)

    def leave_out(self) -> None:
        self.asked.append("left out")

    def hold(self) -> None:
        self.asked.append("hold")

    def close(self, wait_s: float = 0.0) -> bool:
        return True


class FakeSession(Session):
    """A session with a board that is only played."""

    def __init__(self, folder: Path, looked: Looked = LOOKED, machine: str = "virtual") -> None:
        super().__init__(Shared(machine=machine, book=folder / "a.book"), [folder])
        self.fake = FakeLook(looked)

    def open_bench(self) -> MachineLook:
        self.bench = self.fake
        return self.fake


def test_every_input_is_a_word_a_glyph_and_a_role() -> None:
    lamps = {lamp.name: lamp for lamp in machine_view.lamps(BOARD)}
    assert list(lamps) == [
        "stop", "guard", "pedal", "low limit", "high limit", "spindle", "count", "index", "guide",
        "tension", "contact", "air",
    ]  # fmt: skip
    assert (lamps["stop"].look.word, lamps["pedal"].look.word) == ("closed", "not fitted")
    assert (lamps["count"].figure, lamps["tension"].figure) == ("10.00 turns", "12.3 cN")
    assert lamps["guide"].look.role == "unsure"
    bad = replace(BOARD, stop_ok=False, low_ok=False, pedal_down=True, contact_open=True, contact_ohm=None)
    worse = {lamp.name: lamp.look for lamp in machine_view.lamps(bad)}
    assert [worse[name].word for name in ("stop", "low limit", "pedal")] == ["OPEN", "PRESSED", "down"]
    for kind in (INPUTS, STEPS):  # good and bad never differ by colour alone
        good = {look.glyph for look in kind.values() if look.role == "good"}
        assert good & {look.glyph for look in kind.values() if look.role == "bad"} == set()


def test_the_band_says_what_the_board_does_and_what_is_asked() -> None:
    look, coming = machine_view.band(LOOKED)
    assert (look.word, look.glyph) == ("off", "○")
    assert coming.words == "drives off, switched on"
    asked = replace(LOOKED, checking=True, asked=Asked("Please open the guard.", typed=False))
    assert machine_view.band(asked)[1].words == "Please open the guard."
    tripped = replace(BOARD, state="tripped", because="guard", look_to="the guard was opened: close it")
    look, coming = machine_view.band(replace(LOOKED, board=tripped))
    assert (look.word, coming.words) == ("tripped", "guard: the guard was opened: close it")
    look, coming = machine_view.band(Looked("lost", "unplugged"))
    assert (look.word, coming.words, coming.when) == ("no link", "unplugged", "O tries again")


def test_a_step_is_told_with_its_limit_and_what_to_look_at() -> None:
    fault = Result("line", "Line", Verdict.FAULT, "12 reports", "36 to 44", "look at the cable")
    looked = replace(LOOKED, results=(fault,))
    assert machine_view.about(looked, "line") == "Line: 12 reports · wanted 36 to 44 · look at the cable"
    assert machine_view.summed_up(looked) == "✖ 1 fault, 0 of 1 good"
    assert machine_view.summed_up(replace(LOOKED, stopped=True, results=(fault,)[:0])) == ""
    good = replace(fault, verdict=Verdict.GOOD)
    assert machine_view.summed_up(replace(looked, results=(good,), stopped=True)) == (
        "○ stopped: 0 faults, 1 of 1 good"
    )
    assert "hardware stop" in machine_view.summed_up(replace(looked, unconfirmed=True))
    rows = dict(machine_view.rows(replace(looked, checking=True, step="limits"), 80))
    assert rows["line"] == ("Line", STEPS["fault"])
    assert rows["limits"][1] == STEPS["now"]
    assert rows["guide"][1] == STEPS["to come"]


async def room_of(app: WindctlApp, pilot: Pilot[int]) -> MachineScreen:
    await pilot.press("f9")
    room = app.screen
    assert isinstance(room, MachineScreen)
    await pilot.pause(0.15)
    return room


async def test_what_is_typed_goes_to_the_check_and_f8_holds_in_the_line(tmp_path: Path) -> None:
    session = FakeSession(tmp_path)
    app, fake = WindctlApp(session), session.fake
    async with app.run_test(size=(80, 24)) as pilot:
        await room_of(app, pilot)
        await pilot.press("c")
        await pilot.press("u")
        assert fake.asked == [("check", (), True), ("check", (), False)]
        fake.asked.clear()
        fake.shown = replace(LOOKED, checking=True, step="arming", asked=CONSENT)
        await pilot.pause(0.15)
        assert isinstance(app.focused, Input)
        assert "power the drives" in app.export_screenshot().replace("&#160;", " ")
        await pilot.press("f8")
        assert fake.asked == ["hold"]
        await pilot.press("g", "o", "enter")
        await pilot.press("s", "enter")
        assert fake.asked == ["hold", "go", "left out"]
        fake.asked.clear()
        await pilot.press("f3")  # no other room while the machine is at work
        assert isinstance(app.screen, MachineScreen)
        await pilot.press("escape")
        assert fake.asked == ["hold"]
        assert isinstance(app.screen, MachineScreen)
        fake.shown = LOOKED
        await pilot.pause(0.15)
        await pilot.press("f3")
        assert isinstance(app.screen, CoilsScreen)
        await pilot.press("f2")
        assert isinstance(app.screen, RecipesScreen)
        await pilot.pause(0.1)
        assert session.bench is None


async def test_f8_and_space_hold_while_a_check_turns_the_spindle(tmp_path: Path) -> None:
    turning = replace(LOOKED, checking=True, step="hold", board=replace(BOARD, state="turning"))
    session = FakeSession(tmp_path, turning)
    app = WindctlApp(session)
    async with app.run_test(size=(80, 24)) as pilot:
        await room_of(app, pilot)
        await pilot.press("space")
        await pilot.press("f1")
        await pilot.press("f8")
        await pilot.press("space")
        assert session.fake.asked == ["hold", "hold", "hold"]


PROFILE = """\
format = 1
name = "[red]x[/]"  # of the demo shop
[port]
url = "socket://127.0.0.1:9"
[guide]
backlash_mm = 0.02  # in spring
"""


async def test_a_calibration_is_kept_after_its_difference_was_shown(tmp_path: Path) -> None:
    file = tmp_path / "north.toml"
    file.write_text(PROFILE, encoding="utf-8")
    found = Result("guide", "Guide", Verdict.GOOD, calibration={"guide.backlash_mm": 0.08})
    looked = replace(LOOKED, results=(found,), calibration={"guide.backlash_mm": 0.08})
    session = FakeSession(tmp_path, looked, str(file))
    app = WindctlApp(session)
    async with app.run_test(size=(80, 24)) as pilot:
        room = await room_of(app, pilot)
        assert session.bench is None  # a real port is not opened by looking in
        assert "O opens the port" in app.export_screenshot().replace("&#160;", " ")
        await pilot.press("o")
        await pilot.pause(0.3)
        assert "[red]x[/]" in app.export_screenshot()
        assert "SIMULATED" not in app.export_screenshot()
        virtual = replace(BOARD, virtual=True)
        session.fake.shown = replace(looked, board=virtual)
        await pilot.pause(0.15)
        assert "SIMULATED" in app.export_screenshot()  # a board that says so is marked, whatever its port
        assert "K keeps" in str(room.query_one("#check-about", Static).content)
        await pilot.press("k")
        question = app.screen
        assert isinstance(question, Confirm)
        assert "guide.backlash_mm  0.02 → 0.08" in question.words
        await pilot.press("n")
        assert file.read_text(encoding="utf-8") == PROFILE
        await pilot.press("k", "y")
        for _ in range(100):
            await pilot.pause(0.02)
            if "0.08" in file.read_text(encoding="utf-8"):
                break
    assert load_profile(file).guide.backlash_mm == pytest.approx(0.08)
    assert "# in spring" in file.read_text(encoding="utf-8")
    assert session.profile.guide.backlash_mm == pytest.approx(0.08)
