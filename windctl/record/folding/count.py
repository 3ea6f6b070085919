"""The count after somebody told it or turned the spindle back, and whether the guide still stands right."""

from __future__ import annotations

from dataclasses import replace

from windctl.forecast.events import recounted
from windctl.protocol.messages import Capability
from windctl.record.events import CountCorrected, CounterRead, Unwound
from windctl.record.state import Fit, State
from windctl.record.taking_back import kept

# How far off a turn typed by somebody who counted may be.
MISCOUNT_SD_TURNS = 0.5


def corrected(state: State, event: CountCorrected) -> State:
    """The coil stands where it was told to; the board is to be set up for it."""
    in_hand, misplaced = state.in_hand, _guided(state)
    estimate = state.estimate
    if event.miscounted and estimate is not None:
        estimate = recounted(estimate, state.turns, event.turn, MISCOUNT_SD_TURNS)
    return replace(
        state,
        fit=Fit.CORRECTED,
        corrected=event,
        count=round(event.turn * state.counts_per_turn),
        held=state.held if in_hand else None,
        board_count=state.status.count if misplaced and state.status is not None else None,
        misplaced=misplaced,
        estimate=estimate,
        before_typed=None,
        counter=CounterRead(event.at_ms, round(event.turn), event.by) if state.by_eye else None,
    )


def unwound(state: State, event: Unwound) -> State:
    """The board has counted back with the spindle; its guide stayed where it was."""
    held = None if state.held is None else replace(state.held, count=event.count)
    return replace(state, misplaced=_guided(state), held=held, before_typed=None)


def counter_read(state: State, event: CounterRead) -> State:
    """The coil stands where the counter says. More turns than before were wound: whatever was to be looked
    to first is done."""
    if event.doubted:
        return replace(state, doubted=event.turn)
    if event.turn == state.count:
        return replace(state, counter=event, doubted=None)
    estimate = state.estimate
    if event.recounted and estimate is not None:
        estimate = recounted(estimate, state.turns, float(event.turn), MISCOUNT_SD_TURNS)
    return replace(
        state,
        fit=Fit.CORRECTED,
        let_go=True,
        count=event.turn,
        counter=event,
        doubted=None,
        corrected=None,
        estimate=estimate,
        fresh_reading=False,
        settled_readings=0,
        typed=False,
        check=None,
        hold=None,
        hands=None,
        alarm=None,
        before_typed=kept(state),
    )


def _guided(state: State) -> bool:
    """The guide has a motor, and the board knows where it is."""
    started = state.started
    fitted = started is not None and bool(started.setup.fitted & Capability.GUIDE_STEP)
    return fitted and state.guide_known
