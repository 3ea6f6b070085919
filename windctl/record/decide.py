"""(events, wants) = decide(state): what follows from what is known of a coil.

Facts alone decide; time enters only as the board's ticks in them. `events` are new facts to record and fold
before anything acts on them; `wants` is what the board should be, as levels; `asks` is what only a person can
give. `decide` is called again after its events were folded, until it has none left.
"""

from __future__ import annotations

from dataclasses import dataclass

from windctl.forecast.finish import finish_at, so_far
from windctl.forecast.stop import missing_turns, stop_advice
from windctl.forecast.verdict import verdict
from windctl.lay.program import Program
from windctl.plan.pace import pace_for
from windctl.protocol.messages import Arm, Capability, Cause, ClearTrip, Go, InputBit, Refusal, Trip
from windctl.protocol.messages import State as BoardState
from windctl.protocol.wants import Datum, Permission, Sampling, Segments, Wants
from windctl.record.events import (
    CoilFinished,
    Event,
    GoGiven,
    Held,
    StopPointChosen,
    Tripped,
    WentOn,
)
from windctl.record.fold import Fit, State, setup_crc
from windctl.record.program import unpacked

WINDOW_TICKS = 200  # of one reading: whole cycles of 50 and 60 Hz mains
EVERY_TICKS = 250
SETTLED_ENOUGH = 8  # readings at rest before the coil is judged
SETTLE_LIMIT_TICKS = 8_000  # without them it is judged on what there is
MOST_TOP_UPS = 3


@dataclass(frozen=True, slots=True)
class Decision:
    """`events` to fold first; then `wants` for the board.

    `asks` is "go", "clear", "turn" or None: what only a person can give.
    `blocked` says in words why the coil cannot go on by itself, where it cannot.
    """

    events: tuple[Event, ...]
    wants: Wants
    asks: str | None = None
    blocked: str | None = None


def decide(state: State, at_ms: int) -> Decision:
    """What follows from `state`. `at_ms` only dates the new facts; it never decides."""
    if state.started is None:
        return Decision((), Wants())
    if state.finished is not None:
        return Decision((), Wants(beat=True, hold=True))
    noticed = _noticed(state, at_ms)
    if noticed:
        return Decision(noticed, _wants(state))
    if state.fit is Fit.LOST:
        return Decision((), Wants(beat=True, hold=True), "turn", _why_lost(state))
    follows = _stop_point(state, at_ms) or _ending(state, at_ms) or _consent(state, at_ms)
    if follows:
        return Decision(follows, _wants(state))
    return Decision((), _wants(state), _asks(state), _blocked(state))


# ---------------------------------------------------------------- what the board's words amount to


def _noticed(state: State, at_ms: int) -> tuple[Event, ...]:
    status = state.status
    if status is None:
        return ()
    ours = state.fit is Fit.SAME or state.consented_since_greeting
    if status.state == BoardState.TRIPPED and state.tripped is None and ours:
        return (Tripped(at_ms, status.count, status.trip),)
    if status.state == BoardState.TURNING and not state.turning and state.consented_since_greeting:
        return (WentOn(at_ms, status.count),)
    came_to_rest = state.turning or (state.fit is Fit.SAME and state.held is None)
    if came_to_rest and state.standing:
        return (Held(at_ms, status.ticks, status.count, status.cause),)
    return ()


# ---------------------------------------------------------------- where to stop


def _stop_point(state: State, at_ms: int) -> tuple[Event, ...]:
    started = state.started
    assert started is not None and state.estimate is not None
    target = started.target
    cpt = started.setup.counts_per_turn
    if target.kind == "turns":
        count = round(target.value * cpt)
        if state.stop_point == count:
            return ()
        finish = finish_at(state.estimate, target.value)
        return (StopPointChosen(at_ms, count, "the turns asked for", finish.ohm, finish.sd),)
    if state.stop_point is not None and not (state.turning and state.fresh_reading and state.top_ups == 0):
        return ()  # nothing new to learn; and the last missing turns are counted out, not forecast anew
    chosen = None if state.stop_point is None else state.stop_point // cpt
    advice = stop_advice(
        state.estimate,
        state.turns,
        target.value,
        target.min_turns,
        target.max_turns,
        chosen,
        settles=started.readings_mode == "live",
    )
    if advice.turn == chosen:
        return ()
    finish = finish_at(state.estimate, advice.turn)
    words = "the least or most turns allowed" if advice.limited else "where the forecast nears the target"
    return (StopPointChosen(at_ms, advice.turn * cpt, words, finish.ohm, finish.sd),)


# ---------------------------------------------------------------- how it ends


def _ending(state: State, at_ms: int) -> tuple[Event, ...]:
    started, status = state.started, state.status
    assert started is not None
    if state.tripped is not None and state.standing:
        trip = Trip(state.tripped.trip)
        return (
            _finished(state, at_ms, "tripped", f"the board tripped: {trip.name.lower().replace('_', ' ')}"),
        )
    if state.end is not None and state.standing:
        return (_finished(state, at_ms, "stopped", state.end.reason),)
    held = state.held
    if status is None or held is None or state.stop_point is None or state.count < state.stop_point:
        return ()
    if started.readings_mode == "live" and not _settled(state):
        return ()
    if started.target.kind == "turns":
        return (_finished(state, at_ms, "finished", "the turns asked for are wound"),)
    if started.readings_mode != "live" or state.settled_readings == 0:
        return (
            _finished(
                state, at_ms, "finished", "stopped where the forecast meets the target; no settled reading"
            ),
        )
    return _judge_resistance(state, at_ms)


def _settled(state: State) -> bool:
    assert state.held is not None and state.status is not None
    return (
        state.settled_readings >= SETTLED_ENOUGH
        or state.status.ticks - state.held.ticks >= SETTLE_LIMIT_TICKS
    )


def _judge_resistance(state: State, at_ms: int) -> tuple[Event, ...]:
    """At rest, with a settled reading: add the turns still missing, or say how many are too many."""
    started = state.started
    assert started is not None and state.estimate is not None
    target = started.target
    cpt = started.setup.counts_per_turn
    missing = missing_turns(state.estimate, state.turns, target.value)
    more = round(missing.turns)
    room = target.max_turns - round(state.turns)
    if more >= 1 and room >= 1 and state.top_ups < MOST_TOP_UPS:
        more = min(more, room)
        finish = finish_at(state.estimate, state.turns + more)
        words = f"{more} turns missing after the settled reading"
        return (StopPointChosen(at_ms, state.count + more * cpt, words, finish.ohm, finish.sd),)
    if more >= 1 and room < 1:
        return (
            _finished(
                state, at_ms, "finished", f"the most turns allowed are wound; {more} turns are missing"
            ),
        )
    if more <= -1:
        words = f"unwind {-more} +- {max(1, round(1.96 * missing.sd))} turns to meet the target"
        return (_finished(state, at_ms, "finished", words),)
    return (_finished(state, at_ms, "finished", "the target is met"),)


def _finished(state: State, at_ms: int, outcome: str, reason: str) -> CoilFinished:
    started = state.started
    assert started is not None and state.estimate is not None
    turns = state.turns
    finish = so_far(state.estimate, turns)
    u95 = (finish.high - finish.low) / 2.0
    target = started.target
    if target.kind == "turns":
        low = high = turns
    else:
        low, high = finish.low, finish.high
    judged = (
        verdict(low, high, target.value, target.tolerance_pct)
        if outcome == "finished" and (target.kind == "turns" or started.readings_mode != "none")
        else "not judged"
    )
    return CoilFinished(at_ms, outcome, reason, state.count, turns, finish.ohm, u95, judged)


# ---------------------------------------------------------------- consent


def _consent(state: State, at_ms: int) -> tuple[Event, ...]:
    """The starts that follow from a consent already given: after powering the drives, or by the pedal."""
    status, permission = state.status, state.permission
    if status is None or permission is None:
        return ()
    if not _powered_by_consent(state):
        return ()
    if _pedal_fitted(state) and not status.inputs & InputBit.PEDAL_DOWN:
        return ()
    by = "pedal" if _pedal_fitted(state) else "consent"
    return (GoGiven(at_ms, permission.boot, permission.epoch, by),)


def _powered_by_consent(state: State) -> bool:
    """Exactly the powering that was consented to has happened since the consent, and nothing else."""
    consent, status = state.consent, state.status
    return (
        consent is not None
        and status is not None
        and status.state == BoardState.READY
        and status.cause == Cause.ARM
        and status.boot == consent.boot
        and status.epoch == (consent.epoch + 1) & 0xFFFF
    )


def _pedal_fitted(state: State) -> bool:
    assert state.started is not None
    return bool(state.started.setup.fitted & Capability.PEDAL)


def _asks(state: State) -> str | None:
    status, permission = state.status, state.permission
    if status is None or permission is None or state.end is not None:
        return None
    if status.state == BoardState.TRIPPED:
        return None if state.clear == permission else "clear"
    if status.state == BoardState.TURNING or not state.standing:
        return None
    if state.held is not None and state.stop_point is not None and state.count >= state.stop_point:
        return None  # settling
    if _consented(state):
        return None
    if (
        state.fit is Fit.FRESH
        and status.state != BoardState.DRIVES_OFF
        and not state.consented_since_greeting
    ):
        return None  # still to be disarmed and set up
    return "go"


def _consented(state: State) -> bool:
    """A consent is on its way to the board: to power the drives, to start, or it waits for the pedal."""
    return _given(state) is not None or _powered_by_consent(state)


def _given(state: State) -> Permission | None:
    """The consent that counts for the board as it is now."""
    consent = state.consent
    if consent is None or state.permission != Permission(consent.boot, consent.epoch):
        return None
    return state.permission


def _blocked(state: State) -> str | None:
    if state.status is not None and state.status.state == BoardState.TRIPPED:
        return f"the board is tripped ({Trip(state.status.trip).name.lower().replace('_', ' ')})"
    refused = state.refused
    if refused is not None and refused.command in (Arm.CODE, Go.CODE, ClearTrip.CODE):
        return f"the board refused: {Refusal(refused.why).name.lower().replace('_', ' ')}"
    return None


def _why_lost(state: State) -> str:
    identity = state.identity
    assert identity is not None and state.started is not None
    if identity.boot != state.boot:
        why = "the board was reset since"
    elif identity.coil_token != state.started.setup.coil_token:
        why = "the board has had another coil since"
    else:
        why = "what the board reports does not go on from the record"
    says = identity.count / state.counts_per_turn
    return f"{why}; the record ends at turn {state.turns:.2f}, the board says {says:.2f}"


# ---------------------------------------------------------------- what the board should be


def _wants(state: State) -> Wants:
    started, status, permission = state.started, state.status, state.permission
    assert started is not None
    if state.hold is not None or state.end is not None:
        return Wants(beat=True, hold=True, sampling=_sampling(state))
    if state.identity is None or permission is None:
        return Wants(beat=True)
    program = unpacked(started.program_packed)
    given = _given(state)
    drives_off = status is not None and status.state == BoardState.DRIVES_OFF
    to_declare = state.fit in (Fit.FRESH, Fit.CORRECTED)  # until it turns, we say where the coil stands
    setting_up = to_declare and not state.consented_since_greeting
    to_go = given if state.stop_point is not None and state.stop_point > state.count else None
    return Wants(
        beat=True,
        setup=started.setup,
        disarmed=setting_up and not drives_off and state.identity.setup_crc != setup_crc(started),
        datum=_datum(state, program) if to_declare and drives_off else None,
        program=Segments(started.program_id, program),
        armed=given if drives_off else None,
        pace=pace_for(started.pace, state.count, state.stop_point),
        stop_point=state.stop_point,
        go=None if drives_off else to_go,
        sampling=_sampling(state),
        clear_trip=state.clear,
    )


def _sampling(state: State) -> Sampling | None:
    assert state.started is not None
    return Sampling(WINDOW_TICKS, EVERY_TICKS) if state.started.readings_mode == "live" else None


def _datum(state: State, program: bytes) -> Datum | None:
    permission = state.permission
    assert permission is not None
    if state.fit is Fit.FRESH:
        return Datum(count=0, guide=0, next=0, into=0, given_for=permission)
    place = Program.from_packed(program, counts_per_turn=state.counts_per_turn, steps_per_mm=1.0).place_of(
        state.count
    )
    return Datum(
        count=state.count, guide=place.guide, next=place.index, into=place.into, given_for=permission
    )
