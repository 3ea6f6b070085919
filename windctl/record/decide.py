"""(events, wants) = decide(state): what follows from what is known of a coil.

Facts alone decide; time enters only as the board's ticks in them. `events` are new facts to record and fold
before anything acts on them; `wants` is what the board should be, as levels; `asks` is what only a person can
give. `decide` is called again after its events were folded, until it has none left.

noticing   what the board's words amount to
zeroing    what leads and contact have by themselves, before the first turn
stopping   where to stop
ending     how the coil ends
checking   a check of its resistance while it stands
consent    who has consented to what, and what is asked for
wanting    what the board should be
"""

from __future__ import annotations

from dataclasses import dataclass

from windctl.protocol.wants import Wants
from windctl.record.consent import asks, blocked, follows_from_consent, why_lost
from windctl.record.ending import ending
from windctl.record.events import Event
from windctl.record.noticing import noticed
from windctl.record.state import Fit, State
from windctl.record.stopping import stop_point
from windctl.record.wanting import wanted
from windctl.record.zeroing import zero_follows


@dataclass(frozen=True, slots=True)
class Decision:
    """`events` to fold first; then `wants` for the board.

    `asks` is "go", "clear", "leads", "reading", "place", "pass", "look", "count", "turn" or None: what only a
    person can give.
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
    facts = noticed(state, at_ms)
    if facts:
        return Decision(facts, wanted(state))
    if state.fit is Fit.LOST:
        return Decision((), Wants(beat=True, hold=True), "turn", why_lost(state))
    follows = (
        zero_follows(state, at_ms)
        or stop_point(state, at_ms)
        or ending(state, at_ms)
        or follows_from_consent(state, at_ms)
    )
    if follows:
        return Decision(follows, wanted(state))
    return Decision((), wanted(state), asks(state), blocked(state))
