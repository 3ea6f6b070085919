"""Facts in plain words."""

from __future__ import annotations

import pytest

from windctl.protocol.messages import Cause, Trip
from windctl.record.events import (
    DENSE,
    KINDS,
    GoGiven,
    GuideNudged,
    GuideSeen,
    Held,
    HoldRequested,
    LinkLost,
    NoteMade,
    Spliced,
    StopPointChosen,
    Tripped,
    WireBroke,
)
from windctl.tui import telling
from windctl.tui.pictures.curve import Point
from windctl.tui.telling import tell, when
from windctl.tui.trail import MOST, Trail


@pytest.mark.parametrize(
    ("event", "words"),
    [
        (Held(9, 9, 800_000, Cause.STOP_POINT), "stands at 2 000, at the stop point"),
        (Held(9, 9, 800_000, Cause.SILENCE), "stands at 2 000, silence"),
        (HoldRequested(9, "operator", "the hold key"), "hold, asked for by you: the hold key"),
        (GoGiven(9, 1, 1, "virtual"), "go, given by the simulation"),
        (Tripped(9, 400, Trip.TENSION_LOW), "tripped at 1: tension low"),
        (WireBroke(9, 1200.5, "operator"), "the wire broke at turn 1 200.5"),
        (Spliced(9, 1200.5, "operator"), "spliced at turn 1 200.5"),
        (LinkLost(9, "unplugged"), "the line is gone: unplugged"),
        (NoteMade(9, "[red]x[/]", "operator"), "note: [red]x[/]"),
        (
            GuideNudged(9, -10, -0.05, "far", "operator"),
            "the guide is nudged at its far end by you: -0.05 mm",
        ),
        (
            GuideSeen(9, 2080, "far", "operator", 30, 0.15, -0.2),
            "the guide was seen right at its far end by you, nudged by +0.15 mm in all; the ends are 0.20 mm "
            "nearer together than in the program",
        ),
        (GuideSeen(9, 0, "start", "operator"), "the guide was seen right at its start end by you"),
        (
            StopPointChosen(9, 3_178_400, "where the forecast nears the target", 5899.0, 16.0),
            "stop at 7 946: where the forecast nears the target; finish 5.899 ± 0.031 kΩ",
        ),
    ],
    ids=lambda one: getattr(one, "kind", ""),
)
def test_in_words(event: object, words: str) -> None:
    assert tell(event, 400) == words  # type: ignore[arg-type]  # each is an event


def test_the_second_half_of_a_consent_goes_without_saying() -> None:
    assert tell(GoGiven(9, 1, 1, "consent"), 400) is None


def test_every_rare_kind_has_words_of_its_own() -> None:
    """What is named in the module by its class is told by more than its kind."""
    rare = [kind for kind in KINDS.values() if kind not in DENSE]
    assert [kind.__name__ for kind in rare if not hasattr(telling, kind.__name__)] == []


def test_time_is_since_the_run_began() -> None:
    assert when(NoteMade(200_400, "", "")) == "3:20"


def test_a_trail_stays_small_and_keeps_its_ends() -> None:
    trail = Trail()
    for turn in range(1, 100_001):
        trail.add(Point(float(turn), float(turn)))
    assert 0.4 * MOST <= len(trail.points) <= MOST
    assert trail.points[0].turn < 1000
    assert trail.points[-1].turn > 99_000
    assert not trail.add(Point(200_000.0, None))
