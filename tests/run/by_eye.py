"""A bench without a board in the test's own process, its clock faster than the computer's; the true coil."""

from __future__ import annotations

import time
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

from tests.cli.processes import until
from tests.run.winding import ROOT, here, order, with_stop
from windctl.book.book import Book
from windctl.book.open import open_book
from windctl.machine.by_eye import ByEyePort
from windctl.plan.prior import Prior
from windctl.profile.load import load_profile, parse_profile
from windctl.profile.model import MachineProfile
from windctl.record.events import Event
from windctl.run.outcome import Outcome
from windctl.run.requests import CountIs, Hold, Read, Request
from windctl.run.snapshot import Snapshot
from windctl.run.wind import Winding, begin, go_on

MACHINE = ROOT / "recipes/machines/counter-read.toml"
BY_HAND = (ROOT / "recipes/neck-single-by-hand.toml").read_text(encoding="utf-8")
TO_TURNS = with_stop(BY_HAND, turns=800, tolerance_pct=1)
TO_RESISTANCE = with_stop(BY_HAND, dcr_20c_ohm=5800, tolerance_pct=2, min_turns=7000, max_turns=8800)
FASTER = 20.0


def checks() -> MachineProfile:
    """The shipped bench, read where windctl proposes it."""
    return load_profile(MACHINE)


def counts_only() -> MachineProfile:
    """A bench whose coils are not read."""
    return parse_profile('format = 1\nbench = "ql6"\n[spindle]\ncounter = "read"\n')


@dataclass(frozen=True)
class TrueCoil:
    """What really lies on the bobbin: some parts in a hundred off what is foreseen."""

    prior: Prior
    off: float = 1.015

    def ohm(self, turns: float) -> float:
        """Its resistance at 20 °C: R = r*n + g*n*n/2."""
        return self.off * (self.prior.ohm_per_turn * turns + 0.5 * self.prior.growth * turns * turns)

    def turn_for(self, ohm: float) -> float:
        """The turn after which it has so much."""
        return next(n for n in range(20_000) if self.ohm(n) >= ohm)

    def shown(self, turns: float, celsius: float) -> float:
        """What an exact meter shows: copper's 0.393 % per K, 0.7 K over the air, leads, the wire between."""
        warm = 1.0 + 0.00393 * (celsius + 0.7 - 20.0)
        return self.ohm(turns) * warm + self.prior.offset_ohm + self.prior.contact_length_ohm


class Bench:
    """One run, and somebody who types."""

    def __init__(self, winding: Winding, coil: TrueCoil, book: Book) -> None:
        self.winding, self.coil, self.book = winding, coil, book
        self._outcome: Outcome | None = None

    def says(self, request: Request) -> Snapshot:
        """Ask it, and wait for the answer in words."""
        before = self.winding.look().answers
        self.winding.request(request)
        until(lambda: self.winding.look().answers > before)
        return self.winding.look()

    def counter(self, turn: float) -> Snapshot:
        """The counter stands there."""
        return self.says(CountIs("operator", turn))

    def reads(self, celsius: float = 22.0) -> Snapshot:
        """The meter shows what the true coil has now."""
        return self.says(Read("operator", self.coil.shown(self.winding.look().turns, celsius), celsius))

    def waits_for(self, asks: str) -> Snapshot:
        """Until it asks for this."""
        until(lambda: self.winding.look().asks == asks)
        return self.winding.look()

    def close(self) -> Outcome:
        """Leave it open where it has not ended; its record is complete then."""
        if self._outcome is None:
            if self.winding.wait(0.0) is None:
                self.winding.request(Hold("a test", "left", leave=True))
            self._outcome = self.winding.close()
        return self._outcome

    def ends(self) -> Outcome:
        """Until it has ended by itself."""
        until(lambda: self.winding.wait(0.0) is not None)
        return self.close()

    def events(self) -> list[Event]:
        """What is durable of it."""
        return list(self.book.events(self.winding.number))


def port(faster: float = FASTER) -> ByEyePort:
    """Its second thoughts take a fraction of a second."""
    return ByEyePort(lambda: faster * time.monotonic(), lambda s: time.sleep(s / faster))


@contextmanager
def bench(text: str, book: Path, profile: MachineProfile, faster: float = FASTER) -> Iterator[Bench]:
    """A coil begun; left open where the test leaves it so."""
    _, wanted = order(text, profile)
    with open_book(book) as opened:
        winding = begin(wanted, opened, port(faster), here())
        with _running(Bench(winding, TrueCoil(wanted.plan.prior), opened)) as at:
            yield at


@contextmanager
def gone_on(coil: str, book: Path, prior: Prior, at_turn: float | None = None) -> Iterator[Bench]:
    """The same coil in another run, which says nothing of the turn unless it is given."""
    with open_book(book) as opened:
        winding = go_on(coil, opened, port(), here(2), at_turn)
        with _running(Bench(winding, TrueCoil(prior), opened)) as at:
            yield at


@contextmanager
def _running(at: Bench) -> Iterator[Bench]:
    at.winding.start()
    try:
        until(lambda: at.winding.look().asks is not None or at.winding.wait(0.0) is not None)
        yield at
    finally:
        at.close()
