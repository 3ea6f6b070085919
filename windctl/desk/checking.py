"""The bench of a check-up: its port, and on a simulated machine the hand that does what is asked."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from windctl.desk.bench import DEFAULT_SEED, keep_line_trace
from windctl.desk.log import note
from windctl.desk.machines import NO_BOARD
from windctl.errors import FileInvalid, MachineError, Problem, UsageError

if TYPE_CHECKING:
    from windctl.desk.asked import Shared
    from windctl.desk.simulated_hand import SimulatedHand
    from windctl.machine.ports import Port
    from windctl.profile.model import MachineProfile
    from windctl.recipe.model import Recipe


@dataclass(frozen=True, slots=True)
class CheckBench:
    """An open port; `hand` is None on a real machine, where a person stands."""

    port: Port
    hand: SimulatedHand | None


@contextmanager
def open_for_check(
    shared: Shared, profile: MachineProfile, simulated: bool, recipe: Recipe, reference_ohm: float | None
) -> Iterator[CheckBench]:
    """The bench, its port open until the end. Raises MachineError when it is not there or busy, or has no
    board."""
    if profile.by_eye:
        raise MachineError(f"nothing to check: {NO_BOARD}")
    if simulated:
        from windctl.desk.simulated_hand import SimulatedHand
        from windctl.machine.virtual.bench import virtual_bench
        from windctl.machine.virtual.port import VirtualPort

        bench = virtual_bench(
            recipe, profile, DEFAULT_SEED if shared.plant_seed is None else shared.plant_seed
        )
        yield CheckBench(
            VirtualPort(bench, shared.speed or 0.0), SimulatedHand(bench.plant, reference_ohm or 1000.0)
        )
        return
    from windctl.machine.line_trace import LineTrace
    from windctl.machine.serial_port import SerialPort

    for name, value in (("--speed", shared.speed), ("--plant-seed", shared.plant_seed)):
        if value is not None:
            raise UsageError(f"{name} is for a machine simulated in this process, not for a port")
    assert profile.port.url is not None
    trace = LineTrace()
    port = SerialPort(profile.port.url, profile.port.baud, trace=trace)
    note(f"{profile.name}: opened {profile.port.url} at {profile.port.baud} baud for a check")
    try:
        yield CheckBench(port, None)
    finally:
        port.close()
        keep_line_trace(trace, f"{profile.name} at {profile.port.url}, a check")


@dataclass(frozen=True, slots=True)
class Change:
    """One value of a profile that a check would change. `before` None: the profile does not have it."""

    key: str
    before: float | int | None
    after: float | int


def changes(profile: MachineProfile, values: dict[str, float | int]) -> tuple[Change, ...]:
    """What a calibration would change; values that are as they were are left out."""
    found = []
    for key, after in values.items():
        before: object = profile
        for part in key.split("."):
            before = getattr(before, part, None)
        known = before if isinstance(before, int | float) else None
        if known != after:
            found.append(Change(key, known, after))
    return tuple(found)


def save_calibration(file: Path, values: dict[str, float | int]) -> None:
    """Writes the values into the profile, whose text else stays. Raises FileInvalid, the file untouched."""
    from windctl.checkup.keep import with_calibration
    from windctl.errors import ProfileError
    from windctl.forms.source import read_text
    from windctl.profile.load import parse_profile

    try:
        text = with_calibration(read_text(file, ProfileError), values)
    except ValueError as error:
        raise FileInvalid([Problem(str(file), 0, 0, str(error))]) from error
    parse_profile(text, str(file))  # a value that the profile does not allow is not written
    new = file.with_name(f"{file.name}.new")
    try:
        new.write_text(text, encoding="utf-8", newline="")
        new.replace(file)
    except OSError as error:
        raise FileInvalid([Problem(str(file), 0, 0, f"cannot be written: {error}")]) from error
