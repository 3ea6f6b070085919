"""How a coil went, thinned to what a page can show: speed and tension over turns, and the rare facts."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from windctl.protocol.messages import Capability, ReadingFlag
from windctl.protocol.messages import State as BoardState
from windctl.record.events import (
    BoardGreeted,
    CoilStarted,
    Event,
    ReadingTaken,
    ReadingTakenBack,
    ReadingTyped,
    StatusHeard,
)

_PARTS = 300  # of the turns: narrower than a line is wide
_GAP_TICKS = 1000  # ms: reports further apart than this belong to two starts


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
    turned: list[tuple[int, int, int, int]] = []  # ticks, count, speed, temperature, while it turned
    pulled: list[tuple[int, float]] = []  # count, cN
    rare: list[Event] = []
    typed: list[tuple[float, float, float]] = []
    scale, simulated = 0.0, False
    ticks_turned = readings = resting = 0
    for event in events:
        if isinstance(event, StatusHeard):
            status = event.status
            if status.state == BoardState.TURNING:
                if turned and 0 < status.ticks - turned[-1][0] < _GAP_TICKS:
                    ticks_turned += status.ticks - turned[-1][0]
                turned.append((status.ticks, status.count, status.speed, status.celsius))
                if scale and status.tension:
                    pulled.append((status.count, status.tension * scale))
        elif isinstance(event, ReadingTaken):
            readings += 1
            resting += not event.reading.flags & ReadingFlag.TURNING
        else:
            rare.append(event)
            if isinstance(event, BoardGreeted):
                scale = event.identity.tension_scale / 10_000.0
                simulated = simulated or bool(event.identity.capabilities & Capability.VIRTUAL)
            elif isinstance(event, ReadingTyped):
                typed.append((event.turn, event.ohm, event.celsius))
            elif isinstance(event, ReadingTakenBack):
                del typed[-1:]
    celsius = [moment[3] / 100.0 for moment in turned]
    speeds = [(count, speed * 60.0 / per_speed) for _, count, speed, _ in turned]
    return Course(
        speed_rpm=_spans(speeds, per_turn, turns),
        tension_cn=_spans(pulled, per_turn, turns),
        seconds=ticks_turned / 1000.0,
        celsius=(min(celsius), max(celsius)) if celsius else None,
        readings=readings,
        resting_readings=resting,
        rare=tuple(rare),
        hand_read=tuple(typed),
        simulated=simulated,
    )


def _spans(values: Sequence[tuple[int, float]], per_turn: int, turns: float) -> tuple[Span, ...]:
    """Lowest, mean and highest of (count, value) in equal parts of the turns."""
    wide = max(turns, 1.0) / _PARTS
    parts: dict[int, list[float]] = {}
    counts = wide * per_turn
    for count, value in values:
        parts.setdefault(int(count / counts), []).append(value)
    return tuple(
        Span((at + 0.5) * wide, min(some), sum(some) / len(some), max(some))
        for at, some in sorted(parts.items())
    )
