"""The wire joined again, from the same spool or another."""

from __future__ import annotations

from dataclasses import replace

from windctl.forecast.estimator import Estimate
from windctl.forecast.events import new_wire
from windctl.forecast.events import spliced as joined_by_splice
from windctl.record.events import Spliced, WireChanged
from windctl.record.state import State


def spliced(state: State, event: Spliced) -> State:
    """The same wire goes on behind a joint."""
    estimate = None if state.estimate is None else joined_by_splice(state.estimate, event.turn)
    return _joined(state, estimate)


def changed(state: State, event: WireChanged) -> State:
    """Wire of its own level goes on; that the former spool runs out is of no interest any more."""
    estimate = None if state.estimate is None else new_wire(state.estimate, event.turn)
    return replace(_joined(state, estimate), spool_told=True)


def _joined(state: State, estimate: Estimate | None) -> State:
    return replace(
        state,
        estimate=estimate,
        broke=None,
        broke_near=None,
        splices=state.splices + 1,
        before_typed=None,
    )
