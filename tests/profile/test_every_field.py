"""Every key of a profile, wrong in every way: one problem, at its place, with value, limit and unit."""

from __future__ import annotations

import pytest

from tests.forms.every_field import Case, Key, cases, placed
from windctl.errors import ProfileError
from windctl.forms.messages import form_in
from windctl.profile.load import parse_profile
from windctl.profile.model import MachineProfile

GOOD = """\
format = 1
name = "sample"
bench = "b1"
pedal = false
[port]
[board]
[spindle]
[guide]
[tension]
[readings]
"""


def number(name: str, good: str, unit: str, most: str, *, above: str = "", least: str = "") -> Key:
    return Key(name, "number", good, unit, above, least, most)


def whole(name: str, good: str, unit: str, least: str, most: str) -> Key:
    return Key(name, "whole", good, unit, least=least, most=most)


KEYS = (
    Key("name", "text", '"sample"'),
    Key("bench", "text", '"b2"'),
    Key("pedal", "flag", "true"),
    Key("port.url", "text", '"COM3"'),
    whole("port.baud", "57600", "bit/s", "1200", "4000000"),
    Key("port.resets_on_open", "flag", "true"),
    Key("port.vendor", "whole", "6790", least="0", most="65535", needs=("product = 29987",)),
    Key("port.product", "whole", "29987", least="0", most="65535", needs=("vendor = 6790",)),
    Key("port.serial_number", "text", '"A1"', needs=("vendor = 6790", "product = 29987")),
    whole("board.queue_segments", "64", "segments", "8", "65535"),
    Key("spindle.drive", "choice", '"step"', choices=("step", "none")),
    Key("spindle.counter", "choice", '"read"', choices=("board", "read")),
    whole("spindle.counts_per_turn", "400", "counts", "1", "400"),
    whole("spindle.steps_per_turn", "800", "steps", "1", "800"),
    Key("spindle.index", "flag", "true"),
    number("spindle.max_rpm", "900", "rpm", "100000", above="0"),
    number("spindle.accel_rpm_per_s", "200", "rpm/s", "1000000", above="0"),
    number("spindle.decel_rpm_per_s", "200", "rpm/s", "1000000", above="0"),
    Key("guide.kind", "choice", '"hand"', choices=("step", "hand")),
    number("guide.steps_per_mm", "100", "steps/mm", "10000", above="0"),
    number("guide.max_mm_per_s", "20", "mm/s", "10000", above="0"),
    number("guide.start_stop_mm_per_s", "5", "mm/s", "10000", above="0"),
    number("guide.backlash_mm", "0.1", "mm", "100", least="0"),
    number("guide.travel_mm", "30", "mm", "1000", above="0"),
    number("guide.distance_mm", "80", "mm", "10000", above="0"),
    Key("tension.kind", "text", '"magnetic"'),
    Key("tension.sensor", "flag", "true"),
    number("tension.unit_cn", "0.001", "cN", "6", least="0.0001"),
    Key("readings.mode", "choice", '"checks"', choices=("live", "checks", "none")),
    Key("readings.contact", "flag", "false"),
    number("readings.lead_ohm", "0.4", "ohm", "1000000", least="0"),
    number("readings.lead_sd_ohm", "0.2", "ohm", "1000000", least="0"),
    number("readings.gain_sd_pct", "0.2", "%", "100", least="0"),
    number("readings.noise_pct", "0.05", "%", "100", least="0"),
    number("readings.floor_ohm", "0.1", "ohm", "1000000", least="0"),
    number("readings.celsius_sd", "0.3", "K", "50", least="0"),
    number("readings.coil_over_air_k", "1", "K", "100", least="0"),
    number("readings.coil_over_air_sd_k", "0.5", "K", "100", least="0"),
    number("readings.contact_length_mm", "100", "mm", "100000", least="0"),
)
CASES = list(cases(GOOD, KEYS))


def problems(text: str) -> list[str]:
    with pytest.raises(ProfileError) as caught:
        parse_profile(text, "m.toml")
    return str(caught.value).split("\n")


def test_no_key_of_a_profile_is_left_out() -> None:
    known = {"format"}
    for name, field in MachineProfile.model_fields.items():
        table = form_in(field.annotation)
        known |= {name} if table is None else {f"{name}.{key}" for key in table.model_fields}
    assert {key.name for key in KEYS} | {"format"} == known
    assert len(CASES) > 200


@pytest.mark.parametrize("key", KEYS, ids=lambda key: key.name)
def test_the_good_value_is_good(key: Key) -> None:
    parse_profile(placed(GOOD, key, key.good)[0])


@pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)
def test_one_problem_where_it_is(case: Case) -> None:
    assert problems(case.text) == [f"m.toml:{case.said}"]


@pytest.mark.parametrize("key", KEYS, ids=lambda key: key.name)
def test_a_slip_in_a_key_is_found_at_the_key_with_what_was_meant(key: Key) -> None:
    table, _, name = key.name.rpartition(".")
    slip = name[:-1] + "x" + name[-1] if len(name) > 4 else name + "x"
    text, line, _ = placed(GOOD, key, key.good)
    lines = text.splitlines()
    lines.insert(line, f"{slip} = {key.good}")
    where = f"a key of [{table}]" if table else "a key or table of this form"
    dotted = f"{table}.{slip}" if table else slip
    assert problems("\n".join(lines)) == [
        f"m.toml:{line + 1}:1: {dotted} is not {where}; did you mean {name}?"
    ]
