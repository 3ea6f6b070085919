"""A dry pass: agreed to, followed leg by leg, seen through, or ended where it is."""

from __future__ import annotations

from dataclasses import replace

from windctl.protocol.messages import State as BoardState
from windctl.protocol.messages import Trust
from windctl.record.dry_pass import agreed as still_agreed
from windctl.record.dry_pass import goal
from windctl.record.events import GuideNudged, GuideSeen, PassAgreed
from windctl.record.guide_way import (
    FAR,
    HOME,
    START,
    Shown,
    begun_anew,
    broken_off,
    followed,
    nudge,
    settled,
    to_far,
    to_start,
)
from windctl.record.state import State, touched


def agreed(state: State, event: PassAgreed) -> State:
    """The guide may go to its far end and back."""
    assert state.started is not None
    shown = begun_anew(state.shown, shift=state.shown.shift)
    return replace(
        state,
        pass_agreed=event,
        shown=replace(shown, way=to_far(state.started.setup)),
        guide_lost=False,
        boot=event.boot,
        epoch=event.epoch,
        hold=None,
        hands=None,
        refused=None,
    )


def guide_seen(state: State, event: GuideSeen) -> State:
    """On to the other end, unless it has been seen as it is now: then the pass is over at the start."""
    assert state.started is not None
    setup, shown = state.started.setup, state.shown
    seen = (*shown.seen, event.end)
    if event.end != START:
        shown = replace(shown, far_at=shown.shift, seen=seen, way=to_start(setup))
        return replace(state, shown=replace(shown, end=HOME if START in seen else START))
    if FAR in seen:
        return _over(state, shown)
    return replace(state, shown=replace(shown, start_at=shown.shift, seen=seen, way=to_far(setup), end=FAR))


def nudged(state: State, event: GuideNudged) -> State:
    """What was seen before is to be seen again. Nothing, where it came too late for the pass."""
    shown = state.shown
    if state.started is None or state.pass_agreed is None or shown.way or shown.end == HOME:
        return state
    way = nudge(goal(state), event.steps, state.started.setup)
    return replace(state, shown=replace(shown, way=way, seen=()))


def heard(state: State) -> State:
    """After a status, for a coil of which nothing was let go yet."""
    status, shown = state.status, state.shown
    if status is None or state.let_go:
        return state
    if state.pass_agreed is not None:
        if still_agreed(state) is not None:
            if status.state != BoardState.READY or not state.standing:
                return state
            now = followed(shown, status.guide)
            if now is shown:
                return state
            if now.end == HOME and not now.way:
                return _over(state, now)
            return touched(state, {"shown": now})
        if status.state == BoardState.TRIPPED:
            return state  # that is a fact of its own
        state = interrupted(state)
    if state.misplaced and not status.trust & Trust.GUIDE:
        return lost(state)
    if state.shown.unsure is not None:
        return replace(state, shown=settled(state.shown, status.guide, status.epoch))
    return state


def ended(state: State) -> State:
    """A dry pass ends where it is; the guide may stand anywhere between its ends."""
    given = state.pass_agreed
    if given is None:
        return replace(state, pass_wanted=False) if state.pass_wanted else state
    shown = broken_off(state.shown, (given.epoch + 1) & 0xFFFF)
    return replace(state, pass_wanted=False, pass_agreed=None, shown=shown, misplaced=True)


def interrupted(state: State) -> State:
    """The board ended the pass, and nobody wanted that: it is wanted still."""
    return replace(ended(state), pass_wanted=state.pass_agreed is not None)


def lost(state: State) -> State:
    """The board does not know any more where the guide is: somebody puts it to its start, and it is seen."""
    shown = begun_anew(state.shown, shift=0)
    return replace(state, pass_agreed=None, pass_wanted=True, misplaced=False, guide_lost=True, shown=shown)


def _over(state: State, shown: Shown) -> State:
    """Seen at both ends with the same datum, and back at the start."""
    left = replace(begun_anew(shown, shift=shown.shift), far_at=shown.far_at, start_at=shown.start_at)
    return replace(state, pass_wanted=False, pass_agreed=None, misplaced=False, shown=left)
