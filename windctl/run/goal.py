"""What comes next where nobody counts for windctl: up to where somebody is to wind. Pure."""

from __future__ import annotations

from windctl.forecast.finish import Z95, turn_for
from windctl.numbers import grouped
from windctl.plan.pace import OWN_MOTOR_SLOW_TURNS
from windctl.record.state import State
from windctl.record.taking_back import second_thoughts
from windctl.run.counter import NO_POWER, unwinding


def phase_by_eye(state: State) -> str:
    """ "waiting" for the counter's number, "reading" where the coil is to be read, "settling" before what was
    typed counts, "held"."""
    if state.check is not None:
        return "reading"
    if state.hold is not None:
        return "held"
    at_stop = state.stop_point is not None and state.count >= state.stop_point
    return "settling" if state.let_go and at_stop and second_thoughts(state) else "waiting"


def says_by_eye(state: State) -> str:
    """What somebody is to do now."""
    phase = phase_by_eye(state)
    if state.status is None:
        return "begins"
    if phase == "settling":
        return f"the coil ends with {grouped(state.turns)} turns in a moment; undo takes the last turn back"
    if phase == "held":
        return f"held: {NO_POWER}; stop it, then say what the counter says"
    if unwinding(state):
        return "turn the spindle back by hand, then say what the counter says"
    start = ""
    stop = state.stop_point
    if state.let_go and state.counter is None and stop is not None and state.count >= stop:
        ends = f"the record ends at turn {grouped(state.turns)}"
        return f"{ends}, it was to stop at {grouped(stop)}: say what the counter says"
    if state.let_go and state.counter is None:
        start = f"the record ends at turn {grouped(state.turns)}, say so if the counter differs; "
    elif not state.let_go:
        start = "set the counter to 0; "
    elif state.typed:
        start = "insulate the bared spot again; "
    return f"{start}{_goal(state)}"


def stop_half_width(state: State) -> float | None:
    """Half-width of the 95 % interval of the turn that meets a resistance, in turns; None for a coil whose
    turns are its target."""
    started, estimate = state.started, state.estimate
    if started is None or estimate is None or started.target.kind == "turns":
        return None
    return Z95 * turn_for(estimate, started.target.value).sd


def slow_from(state: State) -> float | None:
    """From where somebody's own motor is to be slowed, in turns."""
    if state.stop_point is None:
        return None
    return max(0.0, state.stop_point / state.counts_per_turn - OWN_MOTOR_SLOW_TURNS)


def _goal(state: State) -> str:
    stop = state.stop_point
    if stop is None:
        return "wind, then say what the counter says"
    started = state.started
    checked = started is not None and started.readings_mode == "checks"
    then = "read the counter" if checked else "stop"
    slow = slow_from(state)
    slows = f"; slow down at {grouped(slow)}" if slow is not None and state.turns < slow else ""
    return f"wind to {grouped(stop)} and {then}{slows}"
