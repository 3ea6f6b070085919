"""The guide is shown at both of its ends before the first turn, on the virtual machine: nothing turns
meanwhile, and whatever happens, it is back at its start before anything does."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

import pytest

from tests.run.winding import SHIPPED, here, order, with_stop
from windctl.book.book import Book
from windctl.book.open import open_book
from windctl.machine.virtual.bench import Bench, virtual_bench
from windctl.machine.virtual.port import VirtualPort
from windctl.profile.builtin import VIRTUAL
from windctl.protocol.messages import Capability
from windctl.protocol.messages import State as BoardState
from windctl.record.events import (
    Event,
    GoGiven,
    GuideSeen,
    HoldRequested,
    PassAgreed,
    PassWanted,
    StatusHeard,
    WentOn,
)
from windctl.record.fold import replay
from windctl.run.requests import DryPass, Go, Hold, Request, Seen
from windctl.run.wind import Winding, begin

COIL = with_stop(SHIPPED, turns=60, tolerance_pct=2)


@dataclass
class Shown:
    """A coil on the machine whose guide is to be shown first."""

    winding: Winding
    bench: Bench
    book: Book

    def until(self, what: Callable[[], bool], seconds: float = 60.0) -> None:
        end = time.monotonic() + seconds
        while not what():
            assert time.monotonic() < end, self.winding.look()
            time.sleep(0.002)

    def asked(self, what: str) -> None:
        self.until(lambda: self.winding.look().asks == what)

    def say(self, request: Request) -> None:
        self.winding.request(request)

    def finished(self) -> list[Event]:
        """Wind to the end; the facts, whose replay says the same."""
        ended = self.winding.wait(120.0)
        assert ended is not None and ended.left == "finished", ended
        outcome = self.winding.close()
        assert outcome.summary.turns == 60
        events = list(self.book.events(outcome.number))
        assert replay(events) == ended.state
        return events


@contextmanager
def shown(folder: Path, *, real: bool) -> Iterator[Shown]:
    recipe, wanted = order(COIL)
    bench = virtual_bench(recipe, VIRTUAL, 1)
    if real:
        bench.board.capabilities &= ~int(Capability.VIRTUAL)
    with open_book(folder / "coils.book") as book:
        winding = begin(wanted, book, VirtualPort(bench), here())
        winding.request(DryPass("operator"))
        winding.start()
        run = Shown(winding, bench, book)
        try:
            yield run
        except BaseException:
            winding.request(Hold("a test", "it went wrong", leave=True))
            winding.wait(20.0)
            raise


def first(events: list[Event], kind: type[Event]) -> int:
    return next(place for place, event in enumerate(events) if isinstance(event, kind))


def test_it_goes_to_the_far_end_and_back_and_the_drives_go_off(tmp_path: Path) -> None:
    with shown(tmp_path, real=True) as run:
        run.asked("pass")
        assert run.bench.board.guide == 0
        assert run.winding.look().drives_off
        run.say(Go("operator"))
        run.asked("look")
        setup = run.bench.board.setup
        assert setup is not None
        far = run.bench.board.guide
        assert far == setup.guide_max > 1000
        assert "far end" in run.winding.look().says
        run.say(Seen("operator"))
        run.until(lambda: run.winding.look().asks == "look" and run.bench.board.guide == 0)
        run.say(Seen("operator"))
        run.asked("go")
        assert run.bench.board.state == BoardState.DRIVES_OFF  # a go of its own is wanted for what turns
        run.say(Go("operator"))
        events = run.finished()
    assert first(events, PassAgreed) < first(events, GuideSeen)
    seen = [(event.end, event.guide, event.by) for event in events if isinstance(event, GuideSeen)]
    assert seen == [("far", far, "operator"), ("start", 0, "operator")]
    before = events[: first(events, GoGiven)]
    assert {event.status.count for event in before if isinstance(event, StatusHeard)} == {0}
    assert BoardState.TURNING not in {
        event.status.state for event in before if isinstance(event, StatusHeard)
    }
    assert (
        first(events, WentOn) > first(events, GoGiven) > first(events, GuideSeen) > first(events, PassWanted)
    )


def test_a_hold_ends_it_and_the_guide_goes_home_before_the_first_turn(tmp_path: Path) -> None:
    with shown(tmp_path, real=True) as run:
        run.asked("pass")
        run.say(Go("operator"))
        run.until(lambda: run.bench.board.guide > 300)
        run.say(Hold("operator", "the hold key"))
        run.asked("go")
        assert run.bench.board.state == BoardState.DRIVES_OFF
        assert run.bench.board.guide > 300
        run.say(Go("operator"))
        events = run.finished()
    assert not any(isinstance(event, GuideSeen) for event in events)
    turning = [
        event.status
        for event in events
        if isinstance(event, StatusHeard) and event.status.state == BoardState.TURNING
    ]
    assert abs(turning[0].guide) < 60  # from its start on
    assert first(events, HoldRequested) < first(events, GoGiven) < first(events, WentOn)


def test_a_simulated_machine_agrees_by_itself_and_waits_to_be_looked_at(tmp_path: Path) -> None:
    with shown(tmp_path, real=False) as run:
        run.asked("look")
        time.sleep(0.1)
        assert run.bench.board.count == 0
        run.say(Seen("operator"))
        run.until(lambda: run.winding.look().asks == "look" and run.bench.board.guide == 0)
        run.say(Seen("operator"))
        events = run.finished()
    assert [event.by for event in events if isinstance(event, PassAgreed)] == ["virtual"]


@pytest.mark.parametrize("request_", [Seen("operator"), DryPass("operator")], ids=["seen", "twice"])
def test_what_is_not_asked_for_does_nothing(tmp_path: Path, request_: Request) -> None:
    with shown(tmp_path, real=True) as run:
        run.asked("pass")
        answers = run.winding.look().answers
        run.say(request_)
        run.until(lambda: run.winding.look().answers > answers)
        assert run.winding.look().asks == "pass"
        assert run.bench.board.guide == 0
        run.say(Hold("operator", "not today", leave=True))
        assert run.winding.wait(20.0) is not None
        run.winding.close()
