"""A typed reading can be taken back until somebody goes on or the next reading is taken; so can a typed turn
where nobody else counts."""

from __future__ import annotations

from dataclasses import replace

from windctl.record.state import Before, State

TAKE_BACK_TICKS = 8_000  # a coil that a typed reading would end waits so long for second thoughts


def kept(state: State) -> Before:
    """What a reading or a turn typed now is about to change."""
    return Before(
        ticks=0 if state.status is None else state.status.ticks,
        estimate=state.estimate,
        reading=state.reading,
        readings_used=state.readings_used,
        readings_gated=state.readings_gated,
        settled_readings=state.settled_readings,
        typed=state.typed,
        check=state.check,
        checks=state.checks,
        checked_count=state.checked_count,
        stop_point=state.stop_point,
        top_ups=state.top_ups,
        alarm=state.alarm,
        count=state.count,
        hands=state.hands,
    )


def taken_back(state: State) -> State:
    """The coil without the reading or turn typed last, and without what followed from it."""
    was = state.before_typed
    if was is None:
        return state
    return replace(
        state,
        estimate=was.estimate,
        reading=was.reading,
        fresh_reading=False,
        read_last=False,
        readings_used=was.readings_used,
        readings_gated=was.readings_gated,
        settled_readings=was.settled_readings,
        typed=was.typed,
        check=was.check,
        checks=was.checks,
        checked_count=was.checked_count,
        stop_point=was.stop_point,
        top_ups=was.top_ups,
        alarm=was.alarm,
        count=was.count if state.by_eye else state.count,
        hands=was.hands if state.by_eye else state.hands,
        before_typed=None,
    )


def second_thoughts(state: State) -> bool:
    """A reading or a turn was typed a moment ago: nothing that cannot be undone follows from it yet."""
    was, status = state.before_typed, state.status
    return was is not None and status is not None and status.ticks - was.ticks < TAKE_BACK_TICKS
