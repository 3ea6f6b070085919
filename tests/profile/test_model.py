"""What a profile says, its defaults and its limits."""

from __future__ import annotations

import json

import pytest
from pydantic import BaseModel

from windctl.errors import ProfileError
from windctl.profile.builtin import VIRTUAL
from windctl.profile.load import parse_profile
from windctl.profile.model import MachineProfile

# The outward form's keys and defaults, format 1.
DEFAULTS = {
    "format": 1,
    "name": "virtual",
    "bench": "v1",
    "port": {
        "url": None,
        "baud": 115200,
        "resets_on_open": False,
        "vendor": None,
        "product": None,
        "serial_number": None,
    },
    "board": {"queue_segments": None},
    "spindle": {
        "drive": "none",
        "counter": "board",
        "counts_per_turn": 1,
        "steps_per_turn": 400,
        "index": False,
        "max_rpm": 1000.0,
        "accel_rpm_per_s": 300.0,
        "decel_rpm_per_s": 500.0,
    },
    "guide": {
        "kind": "hand",
        "steps_per_mm": 200.0,
        "max_mm_per_s": 40.0,
        "start_stop_mm_per_s": 10.0,
        "backlash_mm": 0.0,
        "travel_mm": 60.0,
        "distance_mm": 100.0,
    },
    "tension": {"kind": "felt", "sensor": False, "unit_cn": 0.001},
    "pedal": False,
    "readings": {
        "mode": "none",
        "contact": True,
        "lead_ohm": 0.5,
        "lead_sd_ohm": 0.3,
        "gain_sd_pct": 0.3,
        "noise_pct": 0.1,
        "floor_ohm": 0.2,
        "celsius_sd": 0.5,
        "coil_over_air_k": 0.7,
        "coil_over_air_sd_k": 0.7,
        "contact_length_mm": 150.0,
    },
}


BENCH = "Prefix of coil numbers: 1 to 8 of a-z, 0-9."


def problems(text: str) -> list[str]:
    with pytest.raises(ProfileError) as caught:
        parse_profile("format = 1\n" + text, "m.toml")
    return str(caught.value).split("\n")


def test_every_table_is_optional_and_every_key_has_its_default() -> None:
    assert parse_profile("format = 1\n").model_dump() == DEFAULTS


def test_a_table_may_be_given_in_part() -> None:
    profile = parse_profile("format = 1\n[spindle]\nmax_rpm = 600\n")
    assert profile.spindle.max_rpm == 600
    assert profile.spindle.accel_rpm_per_s == 300


def test_the_version_of_the_form_is_needed() -> None:
    with pytest.raises(ProfileError, match=r"m\.toml:1:1: format is missing"):
        parse_profile('name = "x"', "m.toml")


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ('bench = "B1"', f'2:9: bench is "B1", which does not fit: {BENCH}'),
        ('bench = "abcdefghi"', f'2:9: bench is "abcdefghi", which does not fit: {BENCH}'),
        ('bench = ""', f'2:9: bench is "", which does not fit: {BENCH}'),
        ('bench = "b1\\n"', f'2:9: bench is "b1\\n", which does not fit: {BENCH}'),
        ("pedal = 1", "2:9: pedal is 1, where true or false is needed"),
        (
            "[spindle]\ncounts_per_turn = 401",
            "3:19: spindle.counts_per_turn is 401 counts, must be at most 400 counts",
        ),
        (
            "[spindle]\ncounts_per_turn = 0",
            "3:19: spindle.counts_per_turn is 0 counts, must be at least 1 counts",
        ),
        (
            "[spindle]\nsteps_per_turn = 801",
            "3:18: spindle.steps_per_turn is 801 steps, must be at most 800 steps",
        ),
        (
            "[port]\nvendor = 0x1209",
            "3:10: port.vendor is 0x1209, and port.product is missing: both find a board",
        ),
        ("[spindle]\nmax_rpm = 0", "3:11: spindle.max_rpm is 0 rpm, must be more than 0 rpm"),
        ('[spindle]\ndrive = "servo"', '3:9: spindle.drive is "servo", must be "step" or "none"'),
        ("[guide]\nbacklash_mm = -0.1", "3:15: guide.backlash_mm is -0.1 mm, must be at least 0 mm"),
        (
            "[guide]\nbacklash_mm = 60",
            "3:15: guide.backlash_mm is 60 mm, not less than guide.travel_mm of 60 mm",
        ),
        (
            "[guide]\nstart_stop_mm_per_s = 41",
            "3:23: guide.start_stop_mm_per_s is 41 mm/s, more than guide.max_mm_per_s of 40 mm/s",
        ),
        ("[readings]\nlead_ohm = -1", "3:12: readings.lead_ohm is -1 ohm, must be at least 0 ohm"),
        ("[readings]\nfloor_ohm = nan", "3:13: readings.floor_ohm is nan, which is not a finite number"),
        (
            '[redings]\nmode = "live"',
            "2:2: redings is not a key or table of this form; did you mean readings?",
        ),
        ("[pedal]", "2:2: pedal is a table, where true or false is needed"),
    ],
)
def test_one_fault(text: str, said: str) -> None:
    assert problems(text) == [f"m.toml:{said}"]


def test_the_board_issues_at_most_15_khz() -> None:
    """15 000 steps/s at 400 steps per turn are 37.5 turns/s, 2250 rpm."""
    step = '[spindle]\ndrive = "step"\ncounts_per_turn = 400\n'
    assert parse_profile(f"format = 1\n{step}max_rpm = 2250").spindle.max_rpm == 2250
    assert problems(f"{step}max_rpm = 2251") == [
        "m.toml:5:11: spindle.max_rpm is 2251 rpm, which at 400 steps per turn is 15007 steps/s, "
        "more than the board's 15000 steps/s; at most 2250 rpm"
    ]
    assert problems(f"{step}steps_per_turn = 800\nmax_rpm = 1200") == [
        "m.toml:6:11: spindle.max_rpm is 1200 rpm, which at 800 steps per turn is 16000 steps/s, "
        "more than the board's 15000 steps/s; at most 1125 rpm"
    ]


def test_a_fault_of_a_default_points_at_its_table() -> None:
    """With a guide of 500 steps/mm, the default of 40 mm/s is too fast for 15 kHz."""
    text = '[spindle]\ndrive = "step"\ncounts_per_turn = 400\n[guide]\nkind = "step"\nsteps_per_mm = 500\n'
    assert problems(text) == [
        "m.toml:5:2: guide.max_mm_per_s is 40 mm/s, which at 500 steps/mm is 20000 steps/s, "
        "more than the board's 15000 steps/s; at most 30 mm/s"
    ]


def test_without_a_drive_the_counts_are_the_limit() -> None:
    assert parse_profile("format = 1\n[spindle]\nmax_rpm = 30000").spindle.max_rpm == 30000
    assert problems("[spindle]\ncounts_per_turn = 400\nmax_rpm = 2400") == [
        "m.toml:4:11: spindle.max_rpm is 2400 rpm, which at 400 counts per turn is 16000 counts/s, "
        "more than the board's 15000 counts/s; at most 2250 rpm"
    ]


def test_ramps_fit_into_the_boards_16_bits() -> None:
    """65 535 steps/s2 at 400 steps per turn are 9830.25 rpm/s."""
    text = '[spindle]\ndrive = "step"\naccel_rpm_per_s = 9831\n'
    assert problems(text) == [
        "m.toml:4:19: spindle.accel_rpm_per_s is 9831 rpm/s, more than the board's 65535 steps/s2; "
        "at most 9830.25 rpm/s at 400 steps per turn"
    ]


def test_a_guide_motor_needs_counts_to_follow() -> None:
    """One guide step per count at most: with 1 count per turn and 200 steps/mm the guide could go 0.005 mm a
    turn, a tenth of the finest wire of IEC 60317-0-1's table (0.050 mm bare)."""
    (said,) = problems('[spindle]\ndrive = "step"\n[guide]\nkind = "step"\n')
    assert said.startswith('m.toml:5:8: guide.kind is "step", and the guide follows the spindle\'s counts')
    assert "allow a pitch of 0.005 mm" in said
    assert said.endswith("spindle.counts_per_turn of at least 10 is needed")
    parse_profile('format = 1\n[spindle]\ncounts_per_turn = 10\n[guide]\nkind = "step"\n')


def test_the_virtual_machine_has_everything_fitted_but_the_pedal() -> None:
    assert VIRTUAL.spindle.drive == "step"
    assert VIRTUAL.spindle.index
    assert VIRTUAL.guide.kind == "step"
    assert VIRTUAL.tension.sensor
    assert VIRTUAL.readings.mode == "live"
    assert not VIRTUAL.pedal
    assert VIRTUAL.port.url is None


def test_the_virtual_machine_brakes_within_its_queue() -> None:
    """v^2 = 2*a*s: from its highest speed it stands within the 64 turns of 128 segments at two a turn."""
    spindle = VIRTUAL.spindle
    turns_per_s = spindle.max_rpm / 60
    assert turns_per_s**2 / (2 * spindle.decel_rpm_per_s / 60) < 128 / 2


@pytest.mark.parametrize("profile", [VIRTUAL, MachineProfile(format=1)])
def test_the_record_gives_the_profile_back(profile: MachineProfile) -> None:
    text = profile.canonical_json()
    assert MachineProfile.model_validate_json(text) == profile
    assert json.dumps(json.loads(text), sort_keys=True, separators=(",", ":"), ensure_ascii=False) == text


def test_the_record_is_complete() -> None:
    """Defaults may change with the software; what a coil was wound with may not, so they are written out."""
    assert json.loads(MachineProfile(format=1).canonical_json()) == DEFAULTS


def test_profiles_cannot_be_changed() -> None:
    def frozen(model: BaseModel) -> bool:
        inner = [value for value in model.__dict__.values() if isinstance(value, BaseModel)]
        return bool(model.model_config.get("frozen")) and all(frozen(value) for value in inner)

    assert frozen(VIRTUAL)


def test_live_readings_need_a_contact_and_checks_do_without() -> None:
    by_hand = 'format = 1\n[readings]\nmode = "checks"\ncontact = false\n'
    assert not parse_profile(by_hand).readings.by_contact
    with pytest.raises(ProfileError) as raised:
        parse_profile(by_hand.replace("checks", "live"))
    assert "only a contact follows the wire" in str(raised.value)


def test_a_counter_that_is_read_by_eye_goes_with_nothing_that_needs_a_board() -> None:
    assert not MachineProfile(format=1).by_eye
    by_eye = parse_profile('format = 1\n[spindle]\ncounter = "read"\nmax_rpm = 900\n')
    assert by_eye.by_eye
    assert not by_eye.readings.by_contact
    text = (
        'format = 1\npedal = true\n[port]\nurl = "COM3"\n[spindle]\ncounter = "read"\ndrive = "step"\n'
        'counts_per_turn = 40\nindex = true\n[guide]\nkind = "step"\n[tension]\nsensor = true\n'
        '[readings]\nmode = "live"\n'
    )
    with pytest.raises(ProfileError) as raised:
        parse_profile(text, "p.toml")
    needs = 'which needs a board, and spindle.counter is "read"'
    assert [str(problem) for problem in raised.value.problems] == [
        f"p.toml:2:9: pedal is true, {needs}: leave it out",
        f"p.toml:4:7: port.url is 'COM3', {needs}: leave it out",
        f'p.toml:7:9: spindle.drive is "step", {needs}: say "none"',
        f"p.toml:8:19: spindle.counts_per_turn is 40, {needs}: leave it out",
        f"p.toml:9:9: spindle.index is true, {needs}: leave it out",
        f'p.toml:11:8: guide.kind is "step", {needs}: say "hand"',
        f"p.toml:13:10: tension.sensor is true, {needs}: leave it out",
        f'p.toml:15:8: readings.mode is "live", {needs}: say "checks", whose readings are typed, or "none"',
    ]


def test_checks_of_a_coil_that_is_counted_by_eye_are_typed() -> None:
    text = 'format = 1\n[spindle]\ncounter = "read"\n[readings]\nmode = "checks"\ncontact = false\n'
    assert parse_profile(text).readings.mode == "checks"
    with pytest.raises(ProfileError) as raised:
        parse_profile(text.replace("false", "true"), "p.toml")
    assert str(raised.value.problems[0]) == (
        'p.toml:6:11: readings.contact is true, which needs a board, and spindle.counter is "read": '
        "say false, and type what the meter shows"
    )
    with pytest.raises(ProfileError) as raised:
        parse_profile('format = 1\n[port]\nvendor = 6790\nproduct = 29987\n[spindle]\ncounter = "read"\n')
    assert "port.vendor is 6790, which needs a board" in str(raised.value)
