"""What a check leaves behind."""

from __future__ import annotations

from dataclasses import replace

from windctl.record.events import CheckTaken
from windctl.record.state import State


def taken(state: State, event: CheckTaken) -> State:
    """A check that was passed over counts as none, but is not asked for again at this count."""
    checks = state.checks + (1 if event.read else 0)
    before = state.before_typed if event.read else None
    return replace(state, check=None, checks=checks, checked_count=state.count, before_typed=before)
