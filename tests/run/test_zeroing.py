"""The contact is zeroed on the virtual machine before the first turn: by a simulated hand, by somebody at a
machine taken for a real one, and not where nobody can."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import TypeVar

import pytest

from tests.run.winding import SHIPPED, here, order, with_stop
from windctl.book.book import Book
from windctl.book.open import open_book
from windctl.desk.simulated_leads import SimulatedLeads
from windctl.machine.plant.fate import draw_fate
from windctl.machine.virtual.bench import Bench, virtual_bench
from windctl.machine.virtual.port import VirtualPort
from windctl.paper.told import story
from windctl.profile.builtin import VIRTUAL
from windctl.profile.model import MachineProfile
from windctl.protocol.messages import Capability
from windctl.record.events import (
    DENSE,
    AlarmRaised,
    ContactZeroed,
    Event,
    GoGiven,
    ReadingTaken,
    WentOn,
    ZeroEnded,
    ZeroRefused,
)
from windctl.record.fold import replay
from windctl.record.state import State
from windctl.record.zeroing import NOBODY
from windctl.run.requests import DryPass, Go, Hold, Request, Seen, Skip, Together, ZeroContact
from windctl.run.wind import Winding, begin
from windctl.shop.cold_reading import meter_of
from windctl.shop.life import life

Fact = TypeVar("Fact")

TURNS = 60
COIL = with_stop(SHIPPED, turns=TURNS, tolerance_pct=2)
CHECKS = VIRTUAL.model_copy(
    update={"readings": VIRTUAL.readings.model_copy(update={"mode": "checks", "contact": True})}
)


@dataclass
class Bared:
    """A coil on a machine whose contact is to be zeroed."""

    winding: Winding
    bench: Bench
    port: VirtualPort
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

    def put(self, ohm: float | None) -> None:
        """A hand puts the contact on a resistor, and says that the leads are together."""
        self.port.connect(ohm)
        self.say(Together("operator"))

    def finished(self) -> tuple[list[Event], State]:
        """Wind to the end; the facts, whose replay says the same."""
        ended = self.winding.wait(120.0)
        assert ended is not None and ended.left == "finished", ended
        outcome = self.winding.close()
        assert outcome.summary.turns == TURNS
        events = list(self.book.events(outcome.number))
        assert replay(events) == ended.state
        assert self.book.verify().broken == ()
        return events, ended.state


@contextmanager
def bared(
    folder: Path, *, real: bool, profile: MachineProfile = VIRTUAL, first: Request | None = None
) -> Iterator[Bared]:
    recipe, wanted = order(COIL, profile)
    bench = virtual_bench(recipe, profile, 1)
    if real:
        bench.board.capabilities &= ~int(Capability.VIRTUAL)
    port = VirtualPort(bench)
    with open_book(folder / "coils.book") as book:
        winding = begin(wanted, book, port, here())
        winding.request(ZeroContact("operator", simulated_hand=not real) if first is None else first)
        winding.start()
        run = Bared(winding, bench, port, book)
        try:
            yield run
        except BaseException:
            winding.request(Hold("a test", "it went wrong", leave=True))
            winding.wait(20.0)
            raise


def the(events: list[Event], kind: type[Fact]) -> Fact:
    (one,) = [event for event in events if isinstance(event, kind)]
    return one


def test_leads_are_read_taken_off_and_the_coil_is_wound(tmp_path: Path) -> None:
    with bared(tmp_path, real=True) as run:
        run.asked("leads")
        assert "meter's other lead" in run.winding.look().says
        run.until(lambda: run.winding.look().zero.now is not None)  # type: ignore[union-attr]  # it is there
        on_the_wire = run.winding.look().zero
        assert on_the_wire is not None and on_the_wire.now is not None
        assert on_the_wire.now > 0.5  # some wire besides: shown, and not taken for leads
        time.sleep(0.1)
        assert run.winding.look().asks == "leads"
        run.put(0.0)
        run.asked("go")
        seen = run.winding.look().zero
        assert seen is not None and seen.found is not None and seen.contact_off
        assert "contact back on the wire" in run.winding.look().says
        run.port.connect(None)
        run.say(Go("operator"))
        events, state = run.finished()
    found = the(events, ContactZeroed)
    really = draw_fate(run.bench.plant.spec, 1)
    assert found.ohm == pytest.approx(really.gain * really.offset_ohm, abs=2 * found.sd_ohm)
    assert events.index(found) < events.index(the(events, WentOn))
    assert not any(isinstance(event, AlarmRaised) for event in events)
    assert state.estimate is not None and state.estimate.prior.offset_ohm == found.ohm
    told = " ".join(
        line.what for line in story([event for event in events if not isinstance(event, DENSE)], 400)
    )
    assert "Zeroed: leads and contact had" in told
    whole = life(events, ())
    assert whole.made is not None
    lines = {line.name: line.sd for line in whole.made.budget}
    assert lines["leads as zeroed"] == pytest.approx(state.estimate.prior.offset_sd)
    assert f"leads of {meter_of(VIRTUAL).name}" not in lines


def test_a_simulated_hand_does_it_when_asked_and_puts_the_contact_back(tmp_path: Path) -> None:
    with bared(tmp_path, real=False) as run:
        leads = SimulatedLeads(run.port.connect)
        run.asked("leads")
        leads.mind(run.winding.look().zero)
        leads.join()
        run.say(Together("operator"))

        def done() -> bool:
            leads.mind(run.winding.look().zero)
            return run.winding.look().asks == "go"

        run.until(done)
        time.sleep(0.1)
        assert run.bench.board.count == 0  # somebody has the leads in hand: nobody agrees in their place
        leads.mind(run.winding.look().zero)
        run.say(Go("operator"))
        events, state = run.finished()
    the(events, ContactZeroed)
    assert next(event.by for event in events if isinstance(event, GoGiven)) == "operator"
    assert state.readings_used > 0
    assert not any(isinstance(event, AlarmRaised) for event in events)


def test_where_it_is_stopped_to_be_read_the_contact_is_zeroed_as_well(tmp_path: Path) -> None:
    with bared(tmp_path, real=True, profile=CHECKS) as run:
        run.asked("leads")
        run.put(0.0)
        run.asked("go")
        run.port.connect(None)
        run.say(Go("operator"))
        run.asked("reading")
        run.until(lambda: run.winding.wait(0.0) is not None)
        events, _ = run.finished()
    found = the(events, ContactZeroed)
    before = events[: events.index(found)]
    assert sum(isinstance(event, ReadingTaken) for event in before) >= 8


def test_a_coil_between_the_leads_is_refused_and_then_they_are_read(tmp_path: Path) -> None:
    with bared(tmp_path, real=True) as run:
        run.asked("leads")
        run.put(203.0)
        run.until(lambda: "at the most" in run.winding.look().says)
        assert "203" in run.winding.look().says
        run.asked("leads")
        run.put(float("inf"))
        run.until(lambda: "reads open" in run.winding.look().says)
        run.asked("leads")
        run.put(0.0)
        run.asked("go")
        run.port.connect(None)
        run.say(Go("operator"))
        events, _ = run.finished()
    assert [event.why for event in events if isinstance(event, ZeroRefused)] == ["too much", "open"]


def test_it_is_called_off_and_the_profile_s_leads_stand(tmp_path: Path) -> None:
    with bared(tmp_path, real=True) as run:
        run.asked("leads")
        run.say(Skip("operator"))
        run.asked("go")
        run.say(Go("operator"))
        events, state = run.finished()
    the(events, ZeroEnded)
    assert state.zeroed is None
    assert state.estimate is not None and state.estimate.prior.offset_ohm == VIRTUAL.readings.lead_ohm


def test_a_simulated_board_at_which_nobody_stands_says_so_and_winds(tmp_path: Path) -> None:
    with bared(tmp_path, real=False, first=ZeroContact("operator")) as run:
        events, state = run.finished()
    over = the(events, ZeroEnded)
    assert over.reason == NOBODY
    assert state.zeroed is None


def test_before_a_dry_pass_and_the_pass_waits_for_its_go(tmp_path: Path) -> None:
    with bared(tmp_path, real=False) as run:
        run.say(DryPass("operator"))
        run.asked("leads")
        run.put(0.0)
        run.asked("pass")  # a simulated machine would agree by itself, were the contact on the wire
        run.port.connect(None)
        run.say(Go("operator"))
        run.asked("look")
        run.say(Seen("operator"))
        run.until(lambda: run.winding.look().asks == "look" and run.bench.board.guide == 0)
        run.say(Seen("operator"))
        run.asked("go")
        run.say(Go("operator"))
        events, _ = run.finished()
    the(events, ContactZeroed)
