"""What the board should be, as levels."""

from __future__ import annotations

from windctl.lay.program import Place
from windctl.plan.pace import most_pace, pace_for
from windctl.protocol.messages import Capability
from windctl.protocol.messages import State as BoardState
from windctl.protocol.wants import Datum, GuidePlace, Permission, Sampling, Segments, Wants
from windctl.record.consent import given
from windctl.record.dry_pass import agreed, nobody_agreed
from windctl.record.program import place_at, unpacked
from windctl.record.state import Fit, State, setup_crc

WINDOW_TICKS = 200  # of one reading: whole cycles of 50 and 60 Hz mains
EVERY_TICKS = 250


def wanted(state: State) -> Wants:
    """The levels that follow from the state of a coil that has started."""
    started, permission = state.started, state.permission
    assert started is not None
    hands = state.hands is not None and state.powered
    if state.hold is not None or state.end is not None:
        off = hands or nobody_agreed(state)
        return Wants(beat=True, hold=True, disarmed=off, sampling=_sampling(state), clear_trip=state.clear)
    if state.identity is None or permission is None:
        return Wants(beat=True)
    consent = given(state)
    drives_off = state.status is not None and state.status.state == BoardState.DRIVES_OFF
    to_declare = state.fit in (Fit.FRESH, Fit.CORRECTED)  # until it turns, we say where the coil stands
    dry = agreed(state)
    setting_up = to_declare and not state.consented_since_greeting and dry is None and not drives_off
    to_set_up = setting_up and state.identity.setup_crc != setup_crc(started)
    to_go = consent if state.stop_point is not None and state.stop_point > state.count else None
    guide: GuidePlace | None = None
    datum: Datum | None = None
    if dry is not None and not drives_off:
        guide, datum = _leg(state, dry)
    elif state.misplaced:
        if state.powered and consent is not None:
            place = _place(state)
            guide = GuidePlace(place.guide, started.guide_pace, consent)
            datum = _datum(state.count, place, consent)
    elif to_declare and drives_off:
        fresh = state.fit is Fit.FRESH
        datum = Datum(0, 0, 0, 0, permission) if fresh else _datum(state.count, _place(state), permission)
    return Wants(
        beat=True,
        setup=started.setup,
        disarmed=to_set_up or hands or nobody_agreed(state),
        guide=guide,
        datum=datum,
        program=Segments(started.program_id, unpacked(started.program_packed)),
        armed=(consent or dry) if drives_off else None,
        pace=_pace(state),
        stop_point=state.stop_point,
        go=None if drives_off else to_go,
        sampling=_sampling(state),
        clear_trip=state.clear,
    )


def _leg(state: State, dry: Permission) -> tuple[GuidePlace | None, Datum | None]:
    """The leg of the dry pass that is to be made now."""
    assert state.started is not None
    shown = state.shown
    if not shown.way:
        return None, None
    leg = shown.way[0]
    if leg.declares is None:
        return GuidePlace(leg.place, state.started.guide_pace, dry, shown.legs), None
    return None, Datum(0, leg.place, 0, 0, dry, shown.legs)


def _pace(state: State) -> int:
    """The plan's pace here, and no more than somebody asked for."""
    assert state.started is not None
    spec = state.started.pace
    pace = pace_for(spec, state.count, state.stop_point)
    return min(pace, most_pace(spec, state.pace_percent))


def _sampling(state: State) -> Sampling | None:
    assert state.started is not None
    contact = bool(state.started.setup.fitted & Capability.CONTACT)
    asked = state.check is not None or state.zero is not None
    reads = state.started.readings_mode == "live" or (asked and contact)
    return Sampling(WINDOW_TICKS, EVERY_TICKS) if reads else None


def _place(state: State) -> Place:
    assert state.started is not None
    if state.by_eye:
        return Place(0, 0, 0)  # nothing follows the program but a hand
    return place_at(state.started.program_packed, state.counts_per_turn, state.count)


def _datum(count: int, place: Place, permission: Permission) -> Datum:
    return Datum(count=count, guide=place.guide, next=place.index, into=place.into, given_for=permission)
