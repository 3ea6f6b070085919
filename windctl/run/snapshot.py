"""What a screen may look at: one frozen picture of a run, in the units people read.

Made from the folded facts when somebody looks, never stored, never asked for by anything that decides.
"""

from __future__ import annotations

from dataclasses import dataclass

from windctl.forecast.finish import Z95, finish_at, so_far
from windctl.numbers import grouped
from windctl.plan.pace import most_pace
from windctl.protocol.messages import Capability, Cause
from windctl.protocol.messages import State as BoardState
from windctl.record.decide import Decision
from windctl.record.fold import Fit, State
from windctl.record.program import place_at
from windctl.record.taking_back import second_thoughts
from windctl.run.goal import phase_by_eye, says_by_eye, slow_from, stop_half_width
from windctl.run.guide_look import GuideLook, guide_look, says_pass
from windctl.run.trips import look_to
from windctl.run.zero_seen import BACK_ON_THE_WIRE, ZeroSeen, says_zero, zero_seen


@dataclass(frozen=True, slots=True)
class Check:
    """A check that is asked for: at which turn, and the finish's 95 % half-width without and with it, ohm."""

    turn: float
    without_ohm: float
    with_ohm: float
    contact: bool  # the board has a contact that can be touched to the wire
    thermometer: bool  # the board knows how warm it is


@dataclass(frozen=True, slots=True)
class Snapshot:
    """One coil at one moment. None is "not known". Resistances in ohm, intervals are 95 % half-widths."""

    phase: str  # connecting, setting up, ready, turning, stopping, held, settling, tripped, ended
    # where the counter is read by eye instead: connecting, waiting, reading, held, settling, ended
    says: str  # what is happening or happens next, in plain words
    turns: float
    turns_planned: float
    stop_turn: float | None
    pace_rpm: float
    ohm_now: float | None
    celsius: float | None
    ohm_20c_now: float | None
    finish_ohm: float | None
    finish_u95: float | None
    tension_cn: float | None
    guide_mm: float | None
    seconds_left: float | None
    virtual: bool
    asks: str | None
    readings_used: int
    readings_gated: int
    slow_turn: float | None = None  # where the last slow turns begin
    begun: bool = False  # the spindle may have turned for this coil
    drives_off: bool = False  # nothing is powered and nothing turns: hands may go in
    hands: str | None = None  # what somebody reaches into the machine for
    wire_ends_at: float | None = None  # turns that have wire, where the count says more
    guide_place_mm: float | None = None  # where the guide belongs at this turn, from its start
    splices: int = 0
    alarm: str = ""  # what the readings say is wrong, until somebody goes on
    driven: bool = True  # windctl drives the spindle; else it is somebody's own motor
    pace_percent: int = 100  # of the planned pace, that somebody wants at the most
    check: Check | None = None  # the coil stands to be read
    zero: ZeroSeen | None = None  # before the first turn, where the board's contact reads
    can_take_back: bool = False  # a typed reading or turn can still be taken back
    by_eye: bool = False  # nobody counts for windctl: turns are read off a counter and typed
    bared: bool = False  # by eye: the wire was bared here to be read
    told_at_ms: int | None = None  # when in this run the counter was last read and believed
    stop_u95: float | None = None  # turns: of the one that meets a resistance, where it is by eye
    guide_look: GuideLook | None = None  # the guide is shown before the first turn
    answers: int = 0  # requests that were answered in words, and the last answer
    answer: str = ""


def snapshot(state: State, decision: Decision, steps_per_mm: float) -> Snapshot:
    """The picture of `state` for eyes. `steps_per_mm` is the guide's."""
    started, status, identity = state.started, state.status, state.identity
    spt = started.setup.steps_per_turn if started else 1
    speed = status.speed if status else 0
    stop = None if state.stop_point is None else state.stop_point / state.counts_per_turn
    finish = None
    now_20c = None
    if state.estimate is not None and started is not None:
        finish = finish_at(state.estimate, max(stop or started.planned_turns, state.turns))
        if state.readings_used:
            now_20c = so_far(state.estimate, state.turns).ohm
    pulled = started is None or bool(started.setup.fitted & Capability.TENSION)
    guided = started is None or bool(started.setup.fitted & Capability.GUIDE_STEP)
    scale = identity.tension_scale if identity else 0
    return Snapshot(
        phase=_phase(state),
        says=_says(state, decision),
        turns=state.turns,
        turns_planned=started.planned_turns if started else 0.0,
        stop_turn=stop,
        pace_rpm=speed * 60.0 / spt,
        ohm_now=state.reading.ohm if state.reading else None,
        celsius=_celsius(state),
        ohm_20c_now=now_20c,
        finish_ohm=finish.ohm if finish else None,
        finish_u95=(finish.high - finish.low) / 2.0 if finish else None,
        tension_cn=status.tension * scale / 10_000.0 if status and scale and pulled else None,
        guide_mm=status.guide / steps_per_mm if status and steps_per_mm and guided else None,
        seconds_left=_seconds_left(state, stop, speed / spt),
        virtual=bool(identity and identity.capabilities & 128),
        asks=decision.asks,
        readings_used=state.readings_used,
        readings_gated=state.readings_gated,
        slow_turn=slow_from(state) if state.by_eye else _slow_turn(state, stop),
        begun=state.let_go,
        drives_off=state.drives_off,
        hands=state.hands.reason if state.hands else None,
        wire_ends_at=state.wire_ends_at if state.wire_ends_at < state.turns else None,
        guide_place_mm=_guide_place(state, steps_per_mm) if decision.asks == "place" else None,
        splices=state.splices,
        alarm=state.alarm.text if state.alarm else "",
        driven=started is None or bool(started.setup.fitted & Capability.DRIVE_STEP),
        pace_percent=state.pace_percent,
        check=_check(state),
        zero=zero_seen(state),
        can_take_back=state.before_typed is not None and state.finished is None,
        by_eye=state.by_eye,
        bared=state.by_eye and state.typed,
        told_at_ms=None if state.counter is None else state.counter.at_ms,
        stop_u95=stop_half_width(state) if state.by_eye else None,
        guide_look=guide_look(state, steps_per_mm),
    )


def _celsius(state: State) -> float | None:
    """Beside the coil: as the board has it; without a thermometer as it was typed with the last reading."""
    identity, status = state.identity, state.status
    if status is None or identity is None:
        return None
    if identity.capabilities & Capability.THERMOMETER:
        return status.celsius / 100.0
    return None if state.reading is None else state.reading.celsius


def _check(state: State) -> Check | None:
    asked, started, identity = state.check, state.started, state.identity
    if asked is None or started is None or identity is None:
        return None
    return Check(
        turn=asked.turn,
        without_ohm=Z95 * asked.without_ohm,
        with_ohm=Z95 * asked.with_ohm,
        contact=bool(started.setup.fitted & Capability.CONTACT),
        thermometer=bool(identity.capabilities & Capability.THERMOMETER),
    )


def _phase(state: State) -> str:
    status = state.status
    if state.finished is not None:
        return "ended"
    if status is None:
        return "connecting"
    if state.by_eye:
        return phase_by_eye(state)
    if status.state == BoardState.TRIPPED:
        return "tripped"
    if status.state == BoardState.TURNING:
        return "turning"
    if not state.standing:
        return "stopping"
    if status.state == BoardState.DRIVES_OFF:
        return "held" if state.let_go and state.in_hand else "setting up"
    if state.held is not None:
        at_stop = state.stop_point is not None and state.count >= state.stop_point
        return "settling" if at_stop else "held"
    return "ready"


def _says(state: State, decision: Decision) -> str:
    if state.finished is not None:
        return state.finished.reason
    if decision.blocked is not None:
        status = state.status
        if status is not None and status.state == BoardState.TRIPPED:
            return f"{decision.blocked}: {look_to(status.trip)}"
        return decision.blocked
    phase = _phase(state)
    if state.by_eye and phase != "reading":
        return says_by_eye(state)
    if phase == "reading":
        return _says_check(state)
    if phase == "turning" and state.stop_point is not None and state.started is not None:
        stop = state.stop_point / state.counts_per_turn
        slow = _slow_turn(state, stop)
        if slow is not None and state.turns < slow:
            return f"slows at {grouped(slow)}, stops near {grouped(stop)}"
        return f"slow to the stop at {grouped(stop)}"
    if phase == "held":
        return _says_held(state, decision)
    if phase == "settling":
        return "at rest: the reading settles"
    if phase == "stopping":
        return "stopping"
    if state.zero is not None and phase != "connecting":
        return says_zero(state)
    if state.pass_agreed is not None or decision.asks in ("pass", "look"):
        return says_pass(state, decision.asks)
    if decision.asks == "go":
        return f"{BACK_ON_THE_WIRE}, then go" if state.contact_off else "waits for go"
    return {"connecting": "looks for the board", "setting up": "sets the board up", "ready": "drives are on"}[
        phase
    ]


_WHY_HELD = {
    Cause.SILENCE: "the board no longer heard the computer",
    Cause.PEDAL: "the pedal was let go",
    Cause.MAX_COUNT: "the recipe allows no more turns",
    Cause.GREET: "the computer came back to it",
}


def _says_held(state: State, decision: Decision) -> str:
    if decision.asks == "place":
        return "the board no longer knows where the coil stands"
    if state.check is not None:
        return _says_check(state)
    if second_thoughts(state) and decision.asks is None:
        return "the reading counts in a moment; undo takes it back"
    if state.hands is not None:
        off = "drives off, hands may go in" if state.drives_off else "switching the drives off"
        if state.hands.by == "windctl" and state.checked_count == state.count:
            return f"{off}: insulate the bared spot again before it goes on"
        return f"{off}: {state.hands.reason}"
    if state.drives_off:
        return "held, drives off"
    if state.hold is not None:
        reason = state.hold.reason
        return reason if reason.startswith("held") else f"held: {reason}"
    if state.held is None:
        return "held"
    cause = Cause(state.held.cause)
    return f"held: {_WHY_HELD.get(cause, cause.name.lower().replace('_', ' '))}"


def _says_check(state: State) -> str:
    """The check that is asked for, and what it gains."""
    check = state.check
    assert check is not None
    off = "drives off, hands may go in: " if state.drives_off else "switching the drives off: "
    off = "" if state.by_eye else off
    without, with_it = (_brief(Z95 * sd) for sd in (check.without_ohm, check.with_ohm))
    gain = f"the finish is known to ±{without} ohm, with a reading to ±{with_it} ohm"
    return f"{off}read the resistance at turn {grouped(check.turn)}; {gain}"


def _brief(ohm: float) -> str:
    return f"{ohm:.0f}" if ohm >= 10 else f"{ohm:.2g}"


def _guide_place(state: State, steps_per_mm: float) -> float | None:
    started = state.started
    if started is None or not started.setup.fitted & Capability.GUIDE_STEP or not steps_per_mm:
        return None
    return place_at(started.program_packed, state.counts_per_turn, state.count).guide / steps_per_mm


def _slow_turn(state: State, stop: float | None) -> float | None:
    if state.started is None or stop is None:
        return None
    return stop - state.started.pace.finish_counts / state.counts_per_turn


def _seconds_left(state: State, stop: float | None, turns_per_s: float) -> float | None:
    """Time to the stop point at the paces of the recipe; ramps left out."""
    started = state.started
    if started is None or stop is None or state.fit is not Fit.SAME or turns_per_s <= 0:
        return None
    pace, cpt, spt = started.pace, state.counts_per_turn, started.setup.steps_per_turn
    left = max(0.0, stop - state.turns)
    slow = min(left, pace.finish_counts / cpt)
    most = most_pace(pace, state.pace_percent)
    cruise_tps = max(turns_per_s, most / spt) if left > slow else turns_per_s
    return (left - slow) / cruise_tps + slow * spt / min(pace.finish_pace, most)
