"""The bench a coil is wound on: its port, its name, and what only the outermost shell knows of the world."""

from __future__ import annotations

import getpass
import re
import secrets
import uuid
import zlib
from collections.abc import Callable, Iterator
from contextlib import contextmanager, suppress
from dataclasses import dataclass, replace
from datetime import datetime
from typing import TYPE_CHECKING

from windctl.desk import places
from windctl.desk.log import note
from windctl.errors import UsageError

if TYPE_CHECKING:
    from windctl.desk.asked import Shared
    from windctl.machine.line_trace import LineTrace
    from windctl.machine.plant.plant import PlantTruth
    from windctl.machine.ports import Port
    from windctl.plan.experience.supply import Supply
    from windctl.profile.model import MachineProfile
    from windctl.recipe.model import Recipe
    from windctl.record.events import CoilStarted
    from windctl.run.wind import Here

DEFAULT_SEED = 1

# What the record keeps of a simulated machine: enough to simulate the same one again.
_SIMULATED = re.compile(r", plant seed (\d+)(?:, (\d+) coils? and (\d+) m into the spool)?$")


@dataclass(frozen=True, slots=True)
class Bench:
    """An open port and what goes with it. `truth` is of a machine simulated in this process, else None."""

    name: str  # as the record keeps it
    port: Port
    here: Here
    truth: Callable[[], PlantTruth] | None
    profile: MachineProfile  # with the port as it was found
    hand: Callable[[float], None] | None = None  # turns the simulated spindle, in turns; negative unwinds
    connect: Callable[[float | None], None] | None = None  # the simulated contact on ohm; None: the wire
    name_coil: Callable[[str], None] = lambda _number: None  # for whoever else wants this port


@contextmanager
def open_bench(
    shared: Shared,
    profile: MachineProfile,
    simulated: bool,
    recipe: Recipe,
    started: CoilStarted | None = None,
    supply: Supply | None = None,
) -> Iterator[Bench]:
    """The bench, its port open until the end. `started`: the coil that is gone on with. `supply`: the spool
    that a new one is wound from.

    Raises MachineError when the port is not there or busy, UsageError for options that have no meaning on it.
    """
    if profile.by_eye:
        from windctl.machine.by_eye import ByEyePort

        note(f"{profile.name}: no board, its counter is read by eye, for {recipe.name}")
        yield Bench(profile.name, ByEyePort(), _here(), None, profile)
        return
    if not simulated:
        from windctl.machine.line_trace import LineTrace
        from windctl.machine.port_found import found
        from windctl.machine.serial_port import SerialPort

        for name, value in (("--speed", shared.speed), ("--plant-seed", shared.plant_seed)):
            if value is not None:
                raise UsageError(f"{name} is for a machine simulated in this process, not for a port")
        profile = profile.model_copy(update={"port": found(profile.port)})
        assert profile.port.url is not None  # simulated otherwise
        coil = "" if started is None else started.number
        trace = LineTrace()
        port = SerialPort(profile.port.url, profile.port.baud, coil=coil, trace=trace)
        note(f"{profile.name}: opened {profile.port.url} at {profile.port.baud} baud for {recipe.name}")
        try:
            yield Bench(profile.name, port, _here(), None, profile, name_coil=port.name_coil)
        finally:
            port.close()
            note(f"{profile.name}: closed {profile.port.url}")
            keep_line_trace(trace, f"{profile.name} at {profile.port.url}, {recipe.name}")
        return

    from windctl.machine.virtual.bench import virtual_bench
    from windctl.machine.virtual.port import VirtualPort

    drawn = _again(started) if started is not None else _anew(supply)
    if shared.plant_seed is not None:
        drawn = replace(drawn, seed=shared.plant_seed)
    machine = virtual_bench(
        recipe,
        profile,
        drawn.seed,
        spool_seed=drawn.spool_seed,
        coil=drawn.coils,
        wound_m=float(drawn.metres),
    )
    if started is not None and shared.at_turn is not None:
        from windctl.record.program import unpacked

        # The simulated coil went with the process that wound it: the same wire is laid again up to there.
        machine.plant.wound_already(shared.at_turn, unpacked(started.program_packed))
    note(f"{profile.name}: simulated{drawn}, for {recipe.name}")
    simulated_port = VirtualPort(machine, shared.speed or 0.0)
    yield Bench(
        f"{profile.name}{drawn}",
        simulated_port,
        _here(),
        simulated_port.truth,
        profile,
        hand=simulated_port.turn_by_hand,
        connect=simulated_port.connect,
    )


def keep_line_trace(trace: LineTrace, about: str) -> None:
    """Leave the last bytes of the line beside the log, for `windctl diagnose`. A run never ends on it."""
    file = places.line_trace_file()
    closed = datetime.now().astimezone().isoformat(timespec="seconds")
    with suppress(OSError):
        file.parent.mkdir(parents=True, exist_ok=True)
        file.write_text(f"# {about}, closed {closed}\n{trace.text()}", encoding="utf-8")


@dataclass(frozen=True, slots=True)
class _Drawn:
    """Which wire and fate a simulated machine is given; `coils` and `metres` were wound from the spool
    before."""

    seed: int
    spool: str = ""
    coils: int = 0
    metres: int = 0

    @property
    def spool_seed(self) -> int | None:
        """A named spool has its own wire, the same for all coils from it."""
        return zlib.crc32(f"{self.seed} {self.spool}".encode()) if self.spool else None

    def __str__(self) -> str:
        coils = f"{self.coils} coil{'' if self.coils == 1 else 's'}"
        into = f", {coils} and {self.metres} m into the spool" if self.spool else ""
        return f", plant seed {self.seed}{into}"


def _anew(supply: Supply | None) -> _Drawn:
    """The usual, with the wire of the spool that is named."""
    if supply is None:
        return _Drawn(DEFAULT_SEED)
    return _Drawn(DEFAULT_SEED, supply.id, supply.wound_coils, round(supply.wound_m))


def _again(started: CoilStarted) -> _Drawn:
    """What a recorded coil was simulated with, else the usual."""
    match = _SIMULATED.search(started.machine)
    if match is None:
        return _Drawn(DEFAULT_SEED)
    seed, coils, metres = (int(part or 0) for part in match.groups())
    return _Drawn(seed, started.spool, coils, metres)


def _here() -> Here:
    from windctl.run.wind import Here

    return Here(
        wall_time=lambda: datetime.now().astimezone().isoformat(timespec="seconds"),
        year=datetime.now().astimezone().year,
        coil_id=str(uuid.uuid4()),
        nonces=lambda: secrets.randbits(32),
        operator=operator(),
    )


def operator() -> str:
    """Who stands at the bench, as the system knows them."""
    try:
        return getpass.getuser()
    except (KeyError, OSError):  # no such user in the system's list: nobody to name
        return ""
