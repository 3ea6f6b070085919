"""Looking at a board, and checking it from a face that only looks and asks: nothing is powered unasked."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest

from windctl.checkup.step import Verdict
from windctl.desk.asked import Shared
from windctl.desk.checking import Change, changes
from windctl.desk.machine_look import Looked, MachineLook, steps_seen
from windctl.profile.builtin import VIRTUAL
from windctl.profile.model import MachineProfile


@contextmanager
def looking(speed: float = 0.0, profile: MachineProfile = VIRTUAL) -> Iterator[MachineLook]:
    look = MachineLook(Shared(speed=speed), profile, simulated=True)
    look.start()
    try:
        yield look
    finally:
        assert look.close()
        assert look.look().link == "closed"


def until(look: MachineLook, what: Callable[[Looked], bool], seconds: float = 60.0) -> Looked:
    end = time.monotonic() + seconds
    while not what(look.look()):
        assert time.monotonic() < end, f"it did not come to that: {look.look()}"
        time.sleep(0.005)
    return look.look()


def test_looking_shows_the_inputs_and_powers_nothing() -> None:
    with looking() as look:
        board = until(look, lambda one: one.board is not None and one.board.contact_ohm is not None).board
        assert board is not None
        assert (board.state, board.stop_ok, board.guard_ok, board.standing) == (
            "drives off",
            True,
            True,
            True,
        )
        assert board.contact_ohm is not None
        assert 0.0 < board.contact_ohm < 2.0  # nothing is wound: leads and contact alone
        assert board.pedal_down is None  # the built-in machine has none
        assert board.tension_cn is not None
        assert (board.count, board.turns) == (0, 0.0)
        look.hold()
        time.sleep(0.05)
        now = until(look, lambda one: one.board is not None).board
        assert now is not None
        assert now.state == "drives off"


def test_a_whole_check_waits_for_the_typed_go_and_ends_with_the_drives_off() -> None:
    with looking() as look:
        until(look, lambda one: one.board is not None)
        look.check()
        asked = until(look, lambda one: one.asked is not None)
        assert asked.asked is not None
        assert asked.asked.consent
        assert "hardware stop" in asked.asked.text
        assert asked.board is not None
        assert asked.board.state == "drives off"
        assert not any(one.powered for one in asked.steps[: len(asked.results)])
        look.answer("go")
        done = until(look, lambda one: bool(one.results) and not one.checking)
        assert [one.key for one in done.results] == [one.key for one in steps_seen()]
        assert {one.verdict for one in done.results} <= {Verdict.GOOD, Verdict.NOT_FITTED}
        assert set(done.calibration) == {"readings.lead_ohm", "guide.backlash_mm"}
        after = until(look, lambda one: one.board is not None and one.board.state == "drives off")
        assert not after.unconfirmed


def test_anything_but_go_powers_nothing() -> None:
    with looking() as look:
        look.check(("arming", "hold"))
        until(look, lambda one: one.asked is not None)
        look.answer("yes")
        done = until(look, lambda one: len(one.results) == 3 and not one.checking)
        assert [one.verdict for one in done.results[1:]] == [Verdict.LEFT_OUT, Verdict.LEFT_OUT]


def test_a_hold_in_a_check_stops_the_spindle_and_takes_the_drives_off() -> None:
    with looking(speed=4.0) as look:
        look.check(("spindle",))
        until(look, lambda one: one.asked is not None)
        look.answer("go")
        until(look, lambda one: one.board is not None and one.board.state == "turning")
        look.hold()
        done = until(look, lambda one: not one.checking and bool(one.results))
        assert done.results[-1].verdict is Verdict.LEFT_OUT
        assert not done.unconfirmed
        assert done.board is not None
        until(look, lambda one: one.board is not None and one.board.state == "drives off")


def test_closing_while_it_turns_stops_first() -> None:
    with looking(speed=4.0) as look:
        look.check(("spindle",))
        until(look, lambda one: one.asked is not None)
        look.answer("go")
        until(look, lambda one: one.board is not None and one.board.state == "turning")
        assert look.close()
        assert not look.look().unconfirmed


def test_a_port_that_is_not_there_is_told() -> None:
    port = VIRTUAL.port.model_copy(update={"url": "socket://127.0.0.1:9"})
    look = MachineLook(Shared(), VIRTUAL.model_copy(update={"port": port}), simulated=False)
    look.start()
    told = until(look, lambda one: one.link == "closed")
    assert "127.0.0.1:9" in told.why
    look.close()


def test_only_what_differs_is_a_change(tmp_path: Path) -> None:
    values = {"guide.backlash_mm": 0.08, "readings.lead_ohm": VIRTUAL.readings.lead_ohm}
    assert changes(VIRTUAL, values) == (Change("guide.backlash_mm", 0.0, 0.08),)
    assert changes(VIRTUAL, {"board.queue_segments": 64}) == (Change("board.queue_segments", None, 64),)


@pytest.mark.parametrize("keys", [("greeting", "line")])
def test_some_steps_alone(keys: tuple[str, ...]) -> None:
    with looking() as look:
        look.check(keys, powered=False)
        done = until(look, lambda one: len(one.results) == len(keys) and not one.checking)
        assert all(one.verdict is Verdict.GOOD for one in done.results)
