"""A coil's report from what a book holds of it."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING

from windctl.errors import RecordBroken
from windctl.paper.course import course_of
from windctl.paper.history import history_of
from windctl.paper.report import CoilFacts
from windctl.record.addenda import Addendum
from windctl.record.events import CoilStarted, Event
from windctl.record.state import State
from windctl.shop.life import Life, life_of, readings_of

if TYPE_CHECKING:
    from windctl.book.heads import CoilHead


def gathered(
    head: CoilHead,
    events: Iterable[Event],
    addenda: Sequence[Addendum],
    schema: int,
) -> CoilFacts:
    """What `coil_report` needs.

    Raises RecordBroken for a record that does not begin with the coil's start.
    """
    all_events = list(events)
    started = all_events[0] if all_events else None
    if not isinstance(started, CoilStarted):
        raise RecordBroken(f"the record of coil {head.number} does not begin with its start")
    seen = history_of(all_events, head.turns if head.sealed else None)
    turns = seen.state.turns if head.turns is None else head.turns
    return CoilFacts(
        head=head,
        started=started,
        state=seen.state,
        course=course_of(started, all_events, turns),
        curve=seen.points,
        life=_life(seen.state, addenda),
        addenda=tuple(addenda),
        schema=schema,
    )


def _life(state: State, addenda: Sequence[Addendum]) -> Life | None:
    """None where the recorded profile is of a form that this version does not read: what the readings were
    taken with is not known then."""
    try:
        return life_of(readings_of(state, addenda))
    except ValueError:
        return None
