"""Which machine a command speaks to."""

from __future__ import annotations

from pathlib import Path

import pytest

from windctl.cli.options import Shared
from windctl.desk import places
from windctl.desk.machines import configured_machine, kept_profiles, profile_of, simulated_here
from windctl.errors import FileInvalid, MachineError, ProfileError
from windctl.profile.builtin import VIRTUAL

BENCH = """\
format = 1
name = "north bench"
bench = "b1"
[port]
url = "/dev/ttyUSB0"
[spindle]
drive = "step"
counts_per_turn = 400
"""


def keep(name: str, text: str) -> Path:
    """A profile in the user's folder."""
    folder = places.machines_folder()
    folder.mkdir(parents=True, exist_ok=True)
    file = folder / f"{name}.toml"
    file.write_text(text, encoding="utf-8")
    return file


def test_without_anything_said_it_is_the_virtual_machine() -> None:
    assert configured_machine() == "virtual"
    profile = profile_of(Shared())
    assert profile == VIRTUAL
    assert simulated_here(Shared(), profile)


def test_the_configured_machine_is_used_and_an_option_beats_it() -> None:
    keep("north", BENCH)
    places.settings_file().write_text('machine = "north"\n', encoding="utf-8")
    assert profile_of(Shared()).name == "north bench"
    assert profile_of(Shared(machine="virtual")) == VIRTUAL
    assert list(kept_profiles()) == ["north"]


def test_a_profile_may_be_named_as_a_file(tmp_path: Path) -> None:
    file = tmp_path / "mine.toml"
    file.write_text(BENCH, encoding="utf-8")
    assert profile_of(Shared(machine=str(file))).bench == "b1"


def test_an_unknown_name_says_what_is_known_and_where_profiles_are_kept() -> None:
    keep("north", BENCH)
    with pytest.raises(MachineError, match="virtual, north") as caught:
        profile_of(Shared(machine="south"))
    assert str(places.machines_folder()) in str(caught.value)


def test_a_bad_profile_is_told_with_its_line(tmp_path: Path) -> None:
    file = tmp_path / "bad.toml"
    file.write_text(BENCH + "colour = 3\n", encoding="utf-8")
    with pytest.raises(ProfileError, match=r"bad\.toml:9:1"):
        profile_of(Shared(machine=str(file)))


@pytest.mark.parametrize(
    ("content", "said"),
    [
        (b"# mine\nmachine = 3\n", ":2:11: machine is 3, where the name of a machine in quotes is needed"),
        (b"machine = ['a']\n", ":1:11: machine is ['a'], where the name of a machine in quotes is needed"),
        (b"machine = \n", ":1:11: is not valid TOML: Invalid value"),
        (b"machine = north\n", ":1:11: is not valid TOML: Invalid value"),
        (b"\xff", ":1:1: is not UTF-8 text: byte 0xff; save it as UTF-8"),
    ],
)
def test_bad_settings_are_told_with_their_place(content: bytes, said: str) -> None:
    places.settings_file().parent.mkdir(parents=True)
    places.settings_file().write_bytes(content)
    with pytest.raises(FileInvalid) as caught:
        configured_machine()
    assert str(caught.value) == str(places.settings_file()) + said


@pytest.mark.parametrize("content", ["", "# nothing yet\n", 'theme = "dark"\n'])
def test_settings_that_name_no_machine_mean_the_virtual_one(content: str) -> None:
    places.settings_file().parent.mkdir(parents=True)
    places.settings_file().write_text(content, encoding="utf-8")
    assert configured_machine() == "virtual"


def test_options_stand_in_for_what_the_profile_says() -> None:
    keep("north", BENCH)
    shared = Shared(machine="north", readings="checks", port="/dev/ttyACM3")
    profile = profile_of(shared)
    assert profile.readings.mode == "checks"
    assert profile.port.url == "/dev/ttyACM3"
    assert not simulated_here(shared, profile)


def test_a_real_machine_is_simulated_only_when_that_is_said() -> None:
    keep("north", BENCH.replace('[port]\nurl = "/dev/ttyUSB0"\n', ""))
    shared = Shared(machine="north")
    with pytest.raises(MachineError, match="names no port"):
        simulated_here(shared, profile_of(shared))
    shared = Shared(machine="north", port="virtual")
    profile = profile_of(shared)
    assert simulated_here(shared, profile)
    assert profile.port.url is None
