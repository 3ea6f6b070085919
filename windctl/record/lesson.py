"""What one coil's record says for the coils to come."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from windctl.forecast.alarm import find_alarm
from windctl.forecast.taught import open_minded, taught
from windctl.plan.experience.lesson import Lesson, Measured
from windctl.plan.experience.unknowns import meter_rel
from windctl.protocol.messages import Capability
from windctl.record.events import BoardGreeted, CoilStarted, Event, WireChanged
from windctl.record.fold import replay
from windctl.record.state import State

_SPOILS = ("open", "short", "jump")  # what these alarms tell of is no property of the wire or the lay


def lesson_of(events: Sequence[Event], bench: str) -> Lesson | None:
    """The lesson of a coil that has ended; None where its record does not say what to compare it with.

    A coil that was not finished, with which something was wrong, or that was wound from two spools took wire
    and teaches nothing else.
    """
    started = events[0] if events else None
    if not isinstance(started, CoilStarted) or started.basis is None:
        return None
    prior, basis = started.prior, started.basis
    state = replay((replace(started, prior=open_minded(prior, basis)), *events[1:]))
    return Lesson(
        coil=started.number,
        bench=bench,
        spool=started.spool,
        basis=basis,
        turns=state.turns,
        meter_rel=meter_rel(prior.gain_sd, prior.celsius_sd, prior.coil_over_air_sd),
        measured=() if any(isinstance(event, WireChanged) for event in events) else _measured(state),
        simulated=simulated(events),
    )


def simulated(events: Sequence[Event]) -> bool:
    """Whether a virtual machine wound this coil, or a part of it."""
    return any(
        isinstance(event, BoardGreeted) and event.identity.capabilities & Capability.VIRTUAL
        for event in events
    )


def _measured(state: State) -> tuple[Measured, ...]:
    finished, estimate = state.finished, state.estimate
    if finished is None or finished.outcome != "finished" or estimate is None:
        return ()
    wrong = find_alarm(estimate)
    if wrong is not None and wrong.kind in _SPOILS:
        return ()
    return taught(estimate, state.turns)
