"""How a coil went, thinned to what a page can show: speed and tension over turns, and the rare facts."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from windctl.protocol.messages import Capability, Identity, ReadingFlag
from windctl.protocol.messages import State as BoardState
from windctl.record.events import (
    BoardGreeted,
    CoilStarted,
    Event,
    ReadingTaken,
    ReadingTyped,
    StatusHeard,
)

_PARTS = 300  # of the turns: narrower than a line is wide


@dataclass(frozen=True, slots=True)
class Span:
    """What a quantity was while the coil grew from one part of its turns to the next."""

    turn: float  # middle of the part
    low: float
    mean: float
    high: float


@dataclass(frozen=True, slots=True)
class Course:
    """One coil's way. `seconds`: the board's time while the spindle turned. `hand_read`: (turn, ohm, celsius)
    as typed. `simulated`: a board that answered was a simulation."""

    speed_rpm: tuple[Span, ...]
    tension_cn: tuple[Span, ...]
    seconds: float
    celsius: tuple[float, float] | None
    readings: int
    resting_readings: int
    rare: tuple[Event, ...]
    hand_read: tuple[tuple[float, float, float], ...]
    simulated: bool


def course_of(started: CoilStarted, events: Iterable[Event], turns: float) -> Course:
    """The course of a coil that has come to `turns` turns."""
    per_turn = max(started.setup.counts_per_turn, 1)
    per_speed = max(started.setup.steps_per_turn, 1)
    speed, tension = _Parts(turns), _Parts(turns)
    rare: list[Event] = []
    typed: list[tuple[float, float, float]] = []
    identity: Identity | None = None
    simulated = False
    seconds = readings = resting = 0
    coldest, warmest = 32767, -32768
    last = None
    for event in events:
        if isinstance(event, StatusHeard):
            status = event.status
            if status.state == BoardState.TURNING:
                if last is not None and 0 < status.ticks - last < 1000:
                    seconds += status.ticks - last
                turn = status.count / per_turn
                speed.add(turn, status.speed * 60.0 / per_speed)
                if identity is not None and identity.tension_scale and status.tension:
                    tension.add(turn, status.tension * identity.tension_scale / 10_000.0)
                coldest, warmest = min(coldest, status.celsius), max(warmest, status.celsius)
            last = status.ticks
        elif isinstance(event, ReadingTaken):
            readings += 1
            resting += not event.reading.flags & ReadingFlag.TURNING
        else:
            rare.append(event)
            if isinstance(event, BoardGreeted):
                identity, last = event.identity, None
                simulated = simulated or bool(identity.capabilities & Capability.VIRTUAL)
            elif isinstance(event, ReadingTyped):
                typed.append((event.turn, event.ohm, event.celsius))
    return Course(
        speed_rpm=speed.spans(),
        tension_cn=tension.spans(),
        seconds=seconds / 1000.0,
        celsius=None if warmest < coldest else (coldest / 100.0, warmest / 100.0),
        readings=readings,
        resting_readings=resting,
        rare=tuple(rare),
        hand_read=tuple(typed),
        simulated=simulated,
    )


class _Parts:
    """Lowest, mean and highest of a quantity in equal parts of the turns."""

    def __init__(self, turns: float) -> None:
        self._wide = max(turns, 1.0) / _PARTS
        self._parts: dict[int, list[float]] = {}

    def add(self, turn: float, value: float) -> None:
        part = self._parts.get(at := int(turn / self._wide))
        if part is None:
            self._parts[at] = [value, value, value, 1.0]
        else:
            part[0] = min(part[0], value)
            part[1] += value
            part[2] = max(part[2], value)
            part[3] += 1.0

    def spans(self) -> tuple[Span, ...]:
        return tuple(
            Span((at + 0.5) * self._wide, low, total / n, high)
            for at, (low, total, high, n) in sorted(self._parts.items())
        )
