"""What the board should be, as levels."""

from __future__ import annotations

from windctl.lay.program import Program
from windctl.plan.pace import pace_for
from windctl.protocol.messages import State as BoardState
from windctl.protocol.wants import Datum, Sampling, Segments, Wants
from windctl.record.consent import given
from windctl.record.program import unpacked
from windctl.record.state import Fit, State, setup_crc

WINDOW_TICKS = 200  # of one reading: whole cycles of 50 and 60 Hz mains
EVERY_TICKS = 250


def wanted(state: State) -> Wants:
    started, status, permission = state.started, state.status, state.permission
    assert started is not None
    if state.hold is not None or state.end is not None:
        return Wants(beat=True, hold=True, sampling=_sampling(state))
    if state.identity is None or permission is None:
        return Wants(beat=True)
    program = unpacked(started.program_packed)
    consent = given(state)
    drives_off = status is not None and status.state == BoardState.DRIVES_OFF
    to_declare = state.fit in (Fit.FRESH, Fit.CORRECTED)  # until it turns, we say where the coil stands
    setting_up = to_declare and not state.consented_since_greeting
    to_go = consent if state.stop_point is not None and state.stop_point > state.count else None
    return Wants(
        beat=True,
        setup=started.setup,
        disarmed=setting_up and not drives_off and state.identity.setup_crc != setup_crc(started),
        datum=_datum(state, program) if to_declare and drives_off else None,
        program=Segments(started.program_id, program),
        armed=consent if drives_off else None,
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
