"""The facts of one coil, frozen and named in past tense, each in the module of its subject.

Raw facts hold what the board said (integers, board ticks) and `at_ms`, the host's milliseconds since its run
began, on the port's clock. Whatever depended on a clock or on the estimator is a fact too, recorded before it
acted: a replay never has to estimate or measure time again to know what was done.

What a fact does to the state stands in `windctl.record.fold`; what takes more than a line, in the module of
`windctl.record.folding` that is named like the fact's own.
"""

from __future__ import annotations

from typing import get_args

from windctl.record.events.alarms import AlarmRaised
from windctl.record.events.board import BoardGreeted, CommandRefused, LinkLost, StatusHeard
from windctl.record.events.checks import CheckAsked, CheckTaken
from windctl.record.events.consents import ClearGiven, GoGiven
from windctl.record.events.count import CountCorrected, CounterRead, Unwound
from windctl.record.events.course import CoilFinished, CoilStarted, Resumed, StopPointChosen, Target
from windctl.record.events.dry_pass import GuideNudged, GuideSeen, PassAgreed, PassWanted
from windctl.record.events.notes import NoteMade
from windctl.record.events.readings import ReadingTaken, ReadingTakenBack, ReadingTyped
from windctl.record.events.requests import EndRequested, HandsAsked, HoldRequested, PaceAsked
from windctl.record.events.spindle import Held, Tripped, WentOn
from windctl.record.events.wire import Spliced, WireBroke, WireChanged
from windctl.record.events.zeroing import (
    ContactZeroed,
    LeadsTogether,
    ZeroEnded,
    ZeroRefused,
    ZeroWanted,
)

__all__ = [
    "BEFORE_ACTING",
    "DENSE",
    "KINDS",
    "AlarmRaised",
    "BoardGreeted",
    "CheckAsked",
    "CheckTaken",
    "ClearGiven",
    "CoilFinished",
    "CoilStarted",
    "CommandRefused",
    "ContactZeroed",
    "CountCorrected",
    "CounterRead",
    "EndRequested",
    "Event",
    "GoGiven",
    "GuideNudged",
    "GuideSeen",
    "HandsAsked",
    "Held",
    "HoldRequested",
    "LeadsTogether",
    "LinkLost",
    "NoteMade",
    "PaceAsked",
    "PassAgreed",
    "PassWanted",
    "ReadingTaken",
    "ReadingTakenBack",
    "ReadingTyped",
    "Resumed",
    "Spliced",
    "StatusHeard",
    "StopPointChosen",
    "Target",
    "Tripped",
    "Unwound",
    "WentOn",
    "WireBroke",
    "WireChanged",
    "ZeroEnded",
    "ZeroRefused",
    "ZeroWanted",
]

Event = (
    CoilStarted
    | Resumed
    | StopPointChosen
    | CoilFinished
    | BoardGreeted
    | StatusHeard
    | CommandRefused
    | LinkLost
    | WentOn
    | Held
    | Tripped
    | CountCorrected
    | Unwound
    | CounterRead
    | GoGiven
    | ClearGiven
    | HoldRequested
    | EndRequested
    | HandsAsked
    | PaceAsked
    | ZeroWanted
    | LeadsTogether
    | ContactZeroed
    | ZeroRefused
    | ZeroEnded
    | PassWanted
    | PassAgreed
    | GuideNudged
    | GuideSeen
    | WireBroke
    | Spliced
    | WireChanged
    | ReadingTaken
    | ReadingTyped
    | ReadingTakenBack
    | CheckAsked
    | CheckTaken
    | AlarmRaised
    | NoteMade
)

KINDS: dict[str, type[Event]] = {cls.kind: cls for cls in get_args(Event)}

DENSE = (StatusHeard, ReadingTaken)  # many a second: stored in chunks

# Facts that must be durable before what they permit is done.
BEFORE_ACTING = (CoilStarted, Resumed, GoGiven, PassAgreed, GuideNudged, ClearGiven, CountCorrected)
