"""What the board is told: hard limits from the program, bounds in its own units."""

from __future__ import annotations

import pytest

from tests.lay.recipes import WANDER, machine, recipe
from windctl.errors import PlanRefused
from windctl.lay.make import make_program
from windctl.machine.twin.board import Board
from windctl.machine.twin.commands import DONE, HANDLERS
from windctl.plan.board_setup import board_setup
from windctl.profile.builtin import VIRTUAL
from windctl.profile.model import MachineProfile
from windctl.protocol.messages import Capability, Setup
from windctl.recipe.model import Recipe


def setup(asked: Recipe, on: MachineProfile) -> Setup:
    return board_setup(asked, on, make_program(asked, on), 0xC0FFEE)


def test_the_hard_limits_are_the_program_s() -> None:
    on = machine(guide__backlash_mm="0.05")
    told = setup(recipe(WANDER), on)
    assert told.max_count == 8000 * 400
    assert (told.guide_min, told.guide_max) == (-10, 2160)
    assert told.coil_token == 0xC0FFEE


def test_speeds_and_ramps_in_steps() -> None:
    told = setup(recipe(), machine())
    assert (told.counts_per_turn, told.steps_per_turn) == (400, 400)
    assert told.max_pace == round(800 / 60 * 400)
    assert told.accel == round(200 / 60 * 400)  # the recipe's ramp
    assert told.decel == round(
        500 / 60 * 400
    )  # the machine's braking: a Hold does not wait for a gentle ramp
    assert setup(recipe(spindle__ramp_rpm_per_s="900"), machine()).accel == round(300 / 60 * 400)


def test_a_board_takes_what_is_set() -> None:
    """The body is encoded within its fields, for everything fitted and for nothing."""
    for on in (VIRTUAL, MachineProfile(format=1)):
        told = setup(recipe(WANDER), on)
        assert len(told.encode_body()) == Setup.SIZE


def test_what_is_fitted() -> None:
    assert setup(recipe(), VIRTUAL).fitted == int(
        Capability.DRIVE_STEP
        | Capability.GUIDE_STEP
        | Capability.INDEX
        | Capability.CONTACT
        | Capability.TENSION
    )
    assert setup(recipe(), MachineProfile(format=1, pedal=True)).fitted == int(Capability.PEDAL)


@pytest.mark.parametrize(
    ("direction", "mounted", "rotation"),
    [("cw", "face out", 1), ("ccw", "face out", 0), ("cw", "face in", 0), ("ccw", "face in", 1)],
)
def test_the_bobbin_turns_against_the_wire_s_way_round(direction: str, mounted: str, rotation: int) -> None:
    """Wire that lies clockwise came from a standing guide onto a bobbin turning counter-clockwise (1)."""
    asked = recipe(coil__direction_from_face=f'"{direction}"', coil__mounted=f'"{mounted}"')
    assert setup(asked, machine()).rotation == rotation


def test_the_tension_band_in_sensor_units() -> None:
    asked = recipe(tension__set_cn="12.0", tension__band_cn="5.0")
    sensed = machine(tension__sensor="true")
    told = setup(asked, sensed)
    assert (told.tension_low, told.tension_high) == (7000, 17_000)  # 0.001 cN each
    coarse_tension = sensed.tension.model_copy(update={"unit_cn": 0.01})
    coarse = setup(asked, sensed.model_copy(update={"tension": coarse_tension}))
    assert (coarse.tension_low, coarse.tension_high) == (700, 1700)
    wide = setup(recipe(tension__set_cn="12.0", tension__band_cn="90.0"), sensed)
    assert (wide.tension_low, wide.tension_high) == (0, 65_535)
    for unwatched in (setup(asked, machine()), setup(recipe(tension__set_cn="12.0"), sensed)):
        assert (unwatched.tension_low, unwatched.tension_high) == (0, 65_535)


def test_without_a_drive_a_turn_has_as_many_steps_as_counts() -> None:
    on = machine(spindle__drive='"none"', spindle__counts_per_turn="24", guide__kind='"hand"')
    told = setup(recipe(), on)
    assert (told.steps_per_turn, told.counts_per_turn) == (24, 24)
    assert told.max_pace == round(1000 / 60 * 24)  # the machine's own highest speed, not the recipe's
    assert told.decel * 10 >= told.max_pace


@pytest.mark.parametrize(
    ("profile", "changes", "says"),
    [
        ({"spindle__decel_rpm_per_s": "70"}, {}, r"70 rpm/s takes 11\.\d s, and a board allows 10 s"),
        ({}, {"spindle__ramp_rpm_per_s": "5"}, r"^spindle\.ramp_rpm_per_s of 5 rpm/s is 33 steps/s2"),
        ({"spindle__accel_rpm_per_s": "5"}, {}, r"^the machine's spindle\.accel_rpm_per_s of 5 rpm/s"),
    ],
)
def test_what_no_board_takes_is_refused(profile: dict[str, str], changes: dict[str, str], says: str) -> None:
    with pytest.raises(PlanRefused, match=says):
        setup(recipe(**changes), machine(**profile))


@pytest.mark.parametrize("fitted", ["everything", "guide by hand", "counts only"])
def test_the_board_s_twin_takes_it(fitted: str) -> None:
    on = {
        "everything": VIRTUAL,
        "guide by hand": machine(guide__kind='"hand"'),
        "counts only": MachineProfile(format=1),
    }[fitted]
    for asked in (recipe(), recipe(WANDER, tension__set_cn="12.0", tension__band_cn="5.0")):
        board = Board(capabilities=0x7F)
        assert HANDLERS[Setup.CODE](board, setup(asked, on)) == DONE
