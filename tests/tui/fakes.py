"""A run that stands still at one moment, and a session that holds it: no machine, no book, no clock."""

from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path
from typing import Any, cast

from windctl.book.heads import CoilHead
from windctl.desk.asked import Shared
from windctl.plan.growth import Growth
from windctl.record.events import Event, GoGiven, StopPointChosen, WentOn
from windctl.run.outlook import Ahead
from windctl.run.requests import Request
from windctl.run.snapshot import Snapshot
from windctl.run.wind import Winding
from windctl.tui.before_words import Repeats
from windctl.tui.page import Page
from windctl.tui.pictures.curve import Point
from windctl.tui.session import Run, Session
from windctl.tui.view import Card

SNAPSHOT = Snapshot(
    phase="turning",
    says="slows at 7906, stops near 7946",
    turns=4812.25,
    turns_planned=8030.0,
    stop_turn=7946.0,
    pace_rpm=1000.0,
    ohm_now=3492.4,
    celsius=24.1,
    ohm_20c_now=3437.1,
    finish_ohm=5899.0,
    finish_u95=31.0,
    tension_cn=12.3,
    guide_mm=4.21,
    seconds_left=200.0,
    virtual=True,
    asks=None,
    readings_used=1204,
    readings_gated=17,
    slow_turn=7906.0,
    begun=True,
)

CARD = Card(
    number="b1-2026-0147",
    recipe="Bridge single (demo)",
    machine="virtual, plant seed 1",
    target_kind="dcr_20c_ohm",
    target_value=5900.0,
    tolerance_pct=2.0,
    most_turns=8700.0,
    planned_turns=8030.0,
    planned_ohm=5900.0,
    planned_u95=490.0,
    depth_mm=8.5,
    batch="order 118",
    of=6,
    place=3,
)


def mound(turns: float = 8030.0, high_mm: float = 5.2) -> Growth:
    """A bobbin that fills as a mound with sloping edges."""
    columns = [min(1.0, 0.6 + 2.4 * min(place, 127 - place) / 128) for place in range(128)]
    marks = tuple(turns * stage / 16 for stage in range(17))
    heights = tuple(tuple(high_mm * mark / turns * part for part in columns) for mark in marks)
    return Growth(marks, heights, gap_mm=11.0, depth_mm=8.5, datum_mm=0.3, start_flange="base")


def past() -> list[Point]:
    """A curve with a forecast that closes in."""
    return [
        Point(n, 0.63 * n + 1.7e-5 * n * n, 5900 + 260 * math.exp(-n / 900), 30 + 430 * math.exp(-n / 700))
        for n in range(40, 4812, 60)
    ]


class FakeWinding:
    """Says what it was told to say, and keeps what it is asked."""

    def __init__(self, snapshot: Snapshot = SNAPSHOT) -> None:
        self.snapshot = snapshot
        self.requests: list[Request] = []

    def look(self) -> Snapshot:
        return self.snapshot

    def outlook(self) -> tuple[Ahead, ...]:
        return tuple(Ahead(4812 + 392 * k, 3437 + 307 * k, 8 + 3 * k) for k in range(9))

    def facts(self, after: int = 0) -> tuple[Event, ...]:
        facts: tuple[Event, ...] = (
            GoGiven(1_000, 1, 1, "operator"),
            WentOn(2_000, 0),
            StopPointChosen(301_000, 3_178_400, "where the forecast nears the target", 5899.0, 16.0),
        )
        return facts[after:]

    def request(self, request: Request) -> None:
        self.requests.append(request)

    def wait(self, timeout_s: float) -> None:
        return None

    def change(self, **what: Any) -> None:
        """Another moment."""
        self.snapshot = replace(self.snapshot, **what)


class StillSession(Session):
    """A session whose machine and book are never opened."""

    def __init__(self, folders: list[Path], heads: tuple[CoilHead, ...] = ()) -> None:
        super().__init__(Shared(machine="virtual", speed=40.0), folders)
        self._heads = heads

    def open_coils(self) -> tuple[CoilHead, ...]:
        return ()

    def page(self, number: int, query: str = "", sort: str = "") -> Page:
        return Page(self._heads, len(self._heads), number)

    def repeats(self, recipe: str, batch: str) -> Repeats:
        return Repeats()


def run_of(winding: FakeWinding, card: Card = CARD) -> Run:
    """The run as the screens take it."""
    return Run(cast(Winding, winding), card, mound(), 400, past())
