"""A dry pass: agreed to, seen through, or ended where it is."""

from __future__ import annotations

from dataclasses import replace

from windctl.record.dry_pass import START
from windctl.record.events import GuideSeen, PassAgreed
from windctl.record.state import State


def agreed(state: State, event: PassAgreed) -> State:
    """The guide may go to its far end and back."""
    return replace(
        state,
        pass_agreed=event,
        seen_far=False,
        boot=event.boot,
        epoch=event.epoch,
        hold=None,
        hands=None,
        refused=None,
    )


def guide_seen(state: State, event: GuideSeen) -> State:
    """Seen at its start again, the pass is over and the guide where it belongs."""
    if event.end != START:
        return replace(state, seen_far=True)
    return replace(state, pass_wanted=False, pass_agreed=None, seen_far=False)


def ended(state: State) -> State:
    """A dry pass ends where it is; the guide may stand anywhere between its ends."""
    if state.pass_agreed is None:
        return replace(state, pass_wanted=False) if state.pass_wanted else state
    return replace(state, pass_wanted=False, pass_agreed=None, seen_far=False, misplaced=True)
