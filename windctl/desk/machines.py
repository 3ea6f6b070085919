"""Which machine a command speaks to: the profile by name or file, and what the options change about it."""

from __future__ import annotations

import os
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from windctl.desk import places
from windctl.errors import FileInvalid, MachineError, Problem, ProfileError, UsageError

if TYPE_CHECKING:
    from windctl.desk.asked import Shared
    from windctl.profile.model import MachineProfile, Port

VIRTUAL = "virtual"
NO_BOARD = 'this machine has no board and no port, its counter is read by eye (spindle.counter = "read")'


def configured_machine() -> str:
    """The name under `machine` in the user's settings, else `virtual`. Raises FileInvalid."""
    file = places.settings_file()
    if not file.exists():
        return VIRTUAL
    from windctl.forms.source import read_text
    from windctl.forms.toml_form import parsed

    text = read_text(file, FileInvalid)
    if not text.strip():
        return VIRTUAL
    settings, where = parsed(text, str(file), FileInvalid)
    name = settings.get("machine", VIRTUAL)
    if not isinstance(name, str):
        spot = where["machine",].value
        text = f"machine is {name!r}, where the name of a machine in quotes is needed"
        raise FileInvalid([Problem(str(file), spot.line, spot.column, text)])
    return name


def kept_profiles() -> dict[str, Path]:
    """Profiles in the user's folder by name, in alphabetical order."""
    return {file.stem: file for file in sorted(places.machines_folder().glob("*.toml"))}


@dataclass(frozen=True, slots=True)
class KnownMachine:
    """One machine that has a profile. `file` None: the built-in one; `problem`: why its profile is none."""

    name: str
    bench: str | None
    port: str | None
    file: Path | None
    problem: str | None
    usual: bool
    by_eye: bool = False  # no board and no port: its counter is read by eye


def known_machines() -> tuple[KnownMachine, ...]:
    """The built-in machine, then the kept ones by name. Raises FileInvalid for settings that are none."""
    from windctl.profile.builtin import VIRTUAL as BUILT_IN
    from windctl.profile.load import load_profile

    usual = configured_machine()
    known = [KnownMachine(VIRTUAL, BUILT_IN.bench, None, None, None, usual == VIRTUAL)]
    for name, file in kept_profiles().items():
        try:
            profile = load_profile(file)
        except ProfileError as error:
            known.append(KnownMachine(name, None, None, file, str(error.problems[0]), name == usual))
        else:
            known.append(
                KnownMachine(name, profile.bench, profile.port.url, file, None, name == usual, profile.by_eye)
            )
    return tuple(known)


def profile_file(shared: Shared) -> Path | None:
    """The file of the machine asked for; None for the built-in one. Raises MachineError: unknown name."""
    name = shared.machine or configured_machine()
    if name == VIRTUAL:
        return None
    if name.endswith(".toml") or os.sep in name or "/" in name:
        return Path(name)
    kept = kept_profiles()
    if name not in kept:
        known = ", ".join([VIRTUAL, *kept])
        raise MachineError(
            f"there is no machine {name!r}; known: {known}. "
            f"Profiles are kept as NAME.toml in {places.machines_folder()}."
        )
    return kept[name]


def profile_of(shared: Shared) -> MachineProfile:
    """The machine asked for, with --readings and --port in place of what its profile says.

    Raises MachineError for an unknown name, ProfileError for a bad file, UsageError where live readings are
    asked of a machine without a contact.
    """
    from windctl.profile.builtin import VIRTUAL as BUILT_IN
    from windctl.profile.load import load_profile

    file = profile_file(shared)
    profile = BUILT_IN if file is None else load_profile(file)
    if shared.readings is not None:
        if shared.readings == "live" and profile.by_eye:
            raise UsageError(f"--readings live needs a board with a contact; {NO_BOARD}")
        if shared.readings == "live" and not profile.readings.contact:
            raise UsageError("--readings live needs a contact, and the profile says readings.contact = false")
        contact = profile.readings.contact and not profile.by_eye
        readings = profile.readings.model_copy(update={"mode": shared.readings, "contact": contact})
        profile = profile.model_copy(update={"readings": readings})
    if shared.port is not None and shared.port != VIRTUAL:
        port = port_at(profile.port, shared.port)
        profile = profile.model_copy(update={"port": port})
    return profile


def port_at(port: Port, url: str) -> Port:
    """The port at `url`, whatever board is on it."""
    named = {"url": url, "vendor": None, "product": None, "serial_number": None}
    return port.model_copy(update=named)


def simulated_here(shared: Shared, profile: MachineProfile) -> bool:
    """True if the machine is to be simulated in this process; False if the profile names a port, or needs
    none since its counter is read by eye.

    Raises MachineError if the profile is a real machine's and names none; UsageError for a port or a
    simulation where there is no board.
    """
    if profile.by_eye:
        options = (("--port", shared.port), ("--speed", shared.speed), ("--plant-seed", shared.plant_seed))
        for name, value in options:
            if value is not None:
                raise UsageError(f"{name} has no meaning here: {NO_BOARD}")
        return False
    if shared.port == VIRTUAL:
        return True
    if profile.port.url is not None or profile.port.vendor is not None:
        return False
    if profile.name == VIRTUAL:
        return True
    raise MachineError(
        f"the profile {profile.name!r} names no port: give port.url or port.vendor and port.product in it, "
        "or --port URL; "
        f"--port {VIRTUAL} simulates that machine."
    )
