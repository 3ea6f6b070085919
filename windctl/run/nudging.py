"""From a nudge that is asked for to its fact, or to the limit that it would pass. Pure.

Each follows from one key or word, moves the guide alone, and is small; what is more is put right by hand.
"""

from __future__ import annotations

import json
from functools import lru_cache

from windctl.profile.model import Guide
from windctl.record.dry_pass import agreed, goal
from windctl.record.events import GuideNudged, GuideSeen
from windctl.record.guide_way import FAR
from windctl.record.state import State
from windctl.run.requests import Nudge, Seen
from windctl.run.said import Answer

MOST_AT_ONCE_MM = 1.0
MOST_SHIFT_MM = 3.0  # from where the guide was put: a guide that is further off was put wrong
_BY_HAND = "hold; with the drives off move the guide by hand as far as it is off, then say dry pass again"
_EXACT = 1e-9


@lru_cache(maxsize=4)
def guide_of(profile_json: str) -> Guide:
    """The guide of the machine that a coil was begun on."""
    return Guide.model_validate(json.loads(profile_json).get("guide", {}))


def nudged(request: Nudge, state: State, asks: str | None, at_ms: int) -> Answer:
    """The fact of a nudge. While the guide is still on its way to the last one, another key says nothing."""
    shown, started = state.shown, state.started
    if asks != "look" or started is None:
        if agreed(state) is not None and shown.way:
            return Answer()
        return Answer(says="the guide is nudged in a dry pass, where it stands to be looked at")
    guide = guide_of(started.profile_json)
    per_mm = guide.steps_per_mm
    most = min(MOST_AT_ONCE_MM, started.setup.guide_max / per_mm)
    if abs(request.mm) > most + _EXACT:
        return Answer(says=f"{request.mm:g} mm are more than the {most:g} mm of one nudge")
    if not request.mm:
        return Answer(says="0 mm move nothing: say how far, such as nudge 0.1 or nudge -0.1")
    steps = max(1, round(abs(request.mm) * per_mm)) * (1 if request.mm > 0 else -1)
    shift = shown.shift + steps
    if abs(shift) > abs(shown.shift):
        room = guide.travel_mm - (started.setup.guide_max - started.setup.guide_min) / per_mm
        limit = min(MOST_SHIFT_MM, max(room, 0.0))
        if abs(shift) / per_mm > limit + _EXACT:
            whose = "" if limit == MOST_SHIFT_MM else " (guide.travel_mm leaves no more)"
            return Answer(
                says=f"that would be {abs(shift) / per_mm:.2f} mm from where the guide was put; nudging goes "
                f"{limit:.2f} mm at the most{whose}: {_BY_HAND}"
            )
    return Answer((GuideNudged(at_ms, steps, steps / per_mm, shown.end, request.by),))


def seen(request: Seen, state: State, at_ms: int) -> Answer:
    """The fact that the guide is right where it stands, with what nudging has come to by then."""
    started, shown = state.started, state.shown
    assert started is not None
    per_mm = guide_of(started.profile_json).steps_per_mm
    far_at = shown.shift if shown.end == FAR else shown.far_at
    start_at = shown.start_at if shown.end == FAR else shown.shift
    apart = 0 if far_at is None or start_at is None else far_at - start_at
    return Answer(
        (
            GuideSeen(
                at_ms,
                goal(state),
                shown.end,
                request.by,
                shown.shift,
                shown.shift / per_mm,
                apart / per_mm,
            ),
        )
    )
