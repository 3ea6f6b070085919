"""Where to stop."""

from __future__ import annotations

from windctl.forecast.finish import finish_at
from windctl.forecast.stop import stop_advice
from windctl.record.events import Event, StopPointChosen
from windctl.record.state import State


def _read_on_the_way(state: State) -> bool:
    """A reading by hand where the coil stands for another reason than a check."""
    return state.typed and state.check is None and state.checked_count != state.count


def stop_point(state: State, at_ms: int) -> tuple[Event, ...]:
    """Another stop point, if there is a better one than the present."""
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
    learnt = state.fresh_reading and (state.turning or _read_on_the_way(state))
    if state.stop_point is not None and not (learnt and state.top_ups == 0):
        return ()  # nothing new to learn; and the last missing turns are counted out, not forecast anew
    chosen = None if state.stop_point is None else state.stop_point // cpt
    advice = stop_advice(
        state.estimate,
        state.turns,
        target.value,
        target.min_turns,
        target.max_turns,
        chosen,
        settles=started.readings_mode != "none",
    )
    if advice.turn == chosen:
        return ()
    finish = finish_at(state.estimate, advice.turn)
    words = "the least or most turns allowed" if advice.limited else "where the forecast nears the target"
    return (StopPointChosen(at_ms, advice.turn * cpt, words, finish.ohm, finish.sd),)
