"""How fast a program can be turned while the host's own conversation feeds it to the chip over the line."""

from __future__ import annotations

import struct
from dataclasses import dataclass, replace
from itertools import accumulate, count
from pathlib import Path
from typing import Any, Final, cast

from tests.firmware.build import ROOT
from tests.firmware.chip_bench import ChipBench
from windctl.machine.plant.made_for import plant_for
from windctl.machine.plant.plant import Plant
from windctl.machine.virtual.port import VirtualPort
from windctl.plan.board_setup import board_setup
from windctl.plan.make import make_plan
from windctl.plan.model import Plan
from windctl.profile.builtin import VIRTUAL
from windctl.protocol.conversation import Conversation
from windctl.protocol.messages import State, Status
from windctl.protocol.picture import BoardPicture
from windctl.protocol.wants import Datum, Permission, Sampling, Segments, Wants
from windctl.recipe.load import parse_recipe
from windctl.recipe.model import Recipe

ACCEL: Final = 20_000  # steps/s2: soon at the pace; the horizon hangs on decel, which is the profile's
BAUD_BYTES: Final = 11_520  # a second

Planned = tuple[Recipe, Plan]


def densest() -> Planned:
    """The scatter recipe of `recipes/` with the most segments a turn."""
    planned: list[Planned] = []
    for path in sorted((ROOT / "recipes").glob("*.toml")):
        recipe = parse_recipe(path.read_text(encoding="utf-8"), path.name)
        if recipe.lay.style == "scatter":
            planned.append((recipe, make_plan(recipe, VIRTUAL)))
    return max(planned, key=lambda one: one[1].program.segments / one[1].program.turns)


@dataclass(frozen=True)
class Streamed:
    """What was seen at the pace. Counts; `line`: the part of the line's bytes that went to the board."""

    reports: int
    slower: int  # reports of a lower speed than the pace
    spare: int  # the least that lay in the queue beyond what braking takes
    line: float
    worst_busy: int  # cycles of a tick


class _Operator:
    """Consents once to each step, at drives off, ready, and stops."""

    def __init__(self, planned: Planned, pace: int) -> None:
        recipe, plan = planned
        program = plan.program
        setup = board_setup(recipe, VIRTUAL, program, 1)
        self.setup = replace(setup, max_pace=max(pace, setup.max_pace), accel=ACCEL)
        self.pace = pace
        self._segments = Segments(program.id32, program.packed())
        self._given: dict[str, Permission] = {}

    def wants(self, picture: BoardPicture) -> Wants:
        """The program wound at the pace."""
        status, present = picture.status, picture.permission
        wants = Wants(beat=True, setup=self.setup, program=self._segments, pace=self.pace)
        if status is None or present is None:
            return wants
        if not status.trust:
            return replace(wants, datum=Datum(0, 0, 0, 0, self._once("datum", present)))
        if status.state == State.DRIVES_OFF:
            return replace(wants, armed=self._once("arm", present)) if picture.next >= 100 else wants
        go = self._once("go", present)
        return replace(wants, stop_point=self.setup.max_count, go=go, sampling=Sampling(100, 200))

    def _once(self, what: str, present: Permission) -> Permission:
        return self._given.setdefault(what, present)


def stream(elf: Path, planned: Planned, pace: int, seconds: float) -> Streamed:
    """The beginning of the program, turned at `pace` steps/s for so long. Fails if the board stops."""
    recipe, plan = planned
    operator = _Operator(planned, pace)
    ends = [0, *accumulate(counts for counts, _ in struct.iter_unpack("<Hh", plan.program.packed()))]
    bench = ChipBench(elf, Plant(plant_for(recipe, VIRTUAL), 1))
    port = VirtualPort(cast("Any", bench))
    talk = Conversation(count(7))
    horizon = pace * pace // (2 * operator.setup.decel)
    begun: float | None = None
    seen: list[tuple[int, int]] = []  # speed, spare counts
    written = 0
    while begun is None or port.now() < begun + seconds:
        assert port.now() < 30.0 + seconds, "it does not come to its pace"
        for message in talk.receive(port.read(0.005), port.now()):
            if not isinstance(message, Status):
                continue
            if begun is None and message.speed == pace:
                begun, written = port.now(), 0
                bench.begin_measuring()
            if begun is not None:
                assert message.state == State.TURNING, message
                seen.append((message.speed, ends[message.next] - message.count - horizon))
        data = talk.advance(operator.wants(talk.board), port.now())
        written += len(data)
        port.write(data)
    assert bench.chip.overruns == bench.chip.peek("line_overruns") == talk.counters.retries == 0
    return Streamed(
        reports=len(seen),
        slower=sum(speed < pace for speed, _ in seen),
        spare=min(spare for _, spare in seen),
        line=written / (seconds * BAUD_BYTES),
        worst_busy=bench.worst_busy,
    )
