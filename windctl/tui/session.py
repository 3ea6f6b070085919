"""What the interface does in the world: machine, book, runs. The only part of it that touches them.

Everything here may take a while and is called from threads of its own, except `hold`, which only puts a
request into the run's queue and may be called from anywhere, at any time.
"""

from __future__ import annotations

import json
import threading
from collections.abc import Callable
from contextlib import AbstractContextManager, ExitStack, nullcontext
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING

from windctl.desk.asked import Shared
from windctl.desk.books import book_if_any, book_to_read, book_to_write
from windctl.desk.machines import profile_of, simulated_here
from windctl.errors import RecordBroken
from windctl.run.requests import Hold
from windctl.tui.cards import card_for
from windctl.tui.page import PAGE, Page
from windctl.tui.pictures.curve import Point
from windctl.tui.view import Card

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.book.heads import CoilHead
    from windctl.book.verify import VerifyReport
    from windctl.desk.bench import Bench
    from windctl.desk.spools import SpoolState
    from windctl.plan.experience.supply import Supply
    from windctl.plan.growth import Growth
    from windctl.profile.model import MachineProfile
    from windctl.recipe.model import Recipe
    from windctl.record.curve import CurvePoint
    from windctl.record.events import CoilStarted, Event
    from windctl.run.outcome import Outcome
    from windctl.run.wind import Winding
    from windctl.tui.recipes import Listed, Preview

LEAVING_S = 45.0  # to see the spindle stand and the record complete
_Z95 = 1.959964

REAL_TIME = 1.0  # the simulated machine's speed where none is asked for: one practises on it


@dataclass(frozen=True, slots=True)
class Told:
    """A recorded coil as the interface shows it."""

    head: CoilHead
    card: Card
    curve: tuple[Point, ...]
    lines: tuple[tuple[str, str], ...]  # when, what
    machine: str


class Run:
    """A coil being wound, and what is drawn of it."""

    def __init__(
        self, winding: Winding, card: Card, growth: Growth, counts_per_turn: int, before: list[Point]
    ) -> None:
        self._counts_per_turn = counts_per_turn
        self.winding = winding
        self.card = card
        self.growth = growth
        self.before = before  # the curve of earlier runs of this coil
        self.outcome: Outcome | None = None
        self.truth: str = ""
        self.hand: Callable[[float], None] | None = None  # turns a simulated spindle

    @property
    def counts_per_turn(self) -> int:
        """Encoder counts in a turn of the spindle."""
        return self._counts_per_turn


class Session:
    """One sitting at one machine."""

    def __init__(self, shared: Shared, folders: list[Path] | None = None) -> None:
        self.shared = shared
        self._folders = folders
        self._lock = threading.Lock()
        self._leaving = threading.Event()
        self._stack: ExitStack | None = None
        self._bench: Bench | None = None
        self.run: Run | None = None
        self.profile: MachineProfile = profile_of(shared)
        self.simulated = simulated_here(shared, self.profile)

    # ------------------------------------------------------------ before

    @property
    def machine_words(self) -> str:
        """The machine in a few words."""
        if not self.simulated:
            return f"{self.profile.name} · {self.profile.port.url}"
        speed = self.shared.speed
        pace = "as fast as possible" if speed == 0 else f"{REAL_TIME if speed is None else speed:g}×"
        return f"{self.profile.name} · {pace}"

    def recipes(self) -> list[Listed]:
        """All recipes within reach."""
        from windctl.tui import recipes

        return recipes.listed(recipes.folders() if self._folders is None else self._folders)

    def preview(self, one: Listed) -> Preview | str:
        """What a recipe will be on this machine, or why not."""
        from windctl.desk.supply import supply_of
        from windctl.tui import recipes

        def supply_for(recipe: Recipe) -> Supply:
            return supply_of(self.shared, self.profile, recipe, simulated=self.simulated)

        return recipes.preview(one, self.profile, supply_for)

    @property
    def spool(self) -> str | None:
        """The spool that the next coils are wound from, if one is named."""
        return self.shared.spool

    def take_spool(self, name: str | None) -> None:
        """Wind the next coils from this spool, or from none that is named."""
        self.shared = replace(self.shared, spool=name)

    def spools(self) -> tuple[SpoolState, ...]:
        """All spools in the book, in order of their names."""
        from windctl.desk.spools import states_of

        with self._book() as book:
            return () if book is None else states_of(book)

    def last_of(self, recipe: str) -> CoilHead | None:
        """The coil of this recipe that was begun last."""
        with self._book() as book:
            heads = () if book is None else book.list(recipe=recipe, limit=1)
        return heads[0] if heads else None

    # ------------------------------------------------------------ a coil

    def begin(self, preview: Preview, batch: str = "", of: int = 0) -> Run:
        """Open the machine, number the coil, and start its run. Raises WindctlError; nothing is open then."""
        from windctl.run.wind import Order, begin

        with ExitStack() as stack:
            bench, book = self._open(stack, preview.recipe, supply=preview.supply)
            order = Order(
                recipe=preview.recipe,
                recipe_text=preview.listed.text,
                plan=preview.plan,
                profile=bench.profile,
                machine=bench.name,
                batch=batch,
                of=of,
            )
            place = book.count(batch=batch) + 1 if batch else 0
            winding = begin(order, book, bench.port, bench.here)
            recipe = preview.recipe
            card = card_for(recipe.name, winding.number, bench.name, preview.plan, recipe.stop)
            card = replace(card, batch=batch, of=of, place=place, depth_mm=recipe.bobbin.flange_depth_mm)
            return self._started(
                stack, Run(winding, card, preview.growth, self.profile.spindle.counts_per_turn, [])
            )

    def go_on(self, number: str, at_turn: float | None = None) -> Run:
        """Take an open coil up where its record ends. Raises WindctlError; nothing is open then."""
        from windctl.desk.going_on import recorded_profile
        from windctl.plan.growth import growth_of
        from windctl.plan.make import make_plan
        from windctl.recipe.load import parse_recipe
        from windctl.record.curve import review
        from windctl.record.events import CoilStarted
        from windctl.run.wind import go_on

        with ExitStack() as stack:
            with book_to_read(self.shared) as book:
                events = list(book.events(number))
                head = book.find(number)
            started = events[0] if events else None
            if not isinstance(started, CoilStarted):
                raise RecordBroken(f"the record of coil {number} does not begin with its start")
            recipe = parse_recipe(started.recipe_text, number)
            profile = recorded_profile(self.shared, started)
            plan = make_plan(recipe, profile)  # for the drawings; what is wound is in the record
            self.shared = replace(self.shared, at_turn=at_turn)
            bench, book = self._open(stack, recipe, started, profile)
            winding = go_on(number, book, bench.port, bench.here, at_turn)
            card = card_for(recipe.name, number, bench.name, plan, recipe.stop)
            card = replace(card, batch=head.batch, of=head.of, depth_mm=recipe.bobbin.flange_depth_mm)
            before = _points(review(events).curve)
            counts_per_turn = started.setup.counts_per_turn
            growth = growth_of(recipe, profile, plan)
            return self._started(stack, Run(winding, card, growth, counts_per_turn, before))

    def _open(
        self,
        stack: ExitStack,
        recipe: Recipe,
        started: CoilStarted | None = None,
        profile: MachineProfile | None = None,
        supply: Supply | None = None,
    ) -> tuple[Bench, Book]:
        from windctl.desk.bench import open_bench

        shared = self.shared
        if self.simulated and shared.speed is None:
            shared = replace(shared, speed=REAL_TIME)
        profile = profile or self.profile
        bench = stack.enter_context(open_bench(shared, profile, self.simulated, recipe, started, supply))
        book = stack.enter_context(book_to_write(shared))
        self._bench = bench
        return bench, book

    def _started(self, stack: ExitStack, run: Run) -> Run:
        self._leaving.clear()
        if self._bench is not None:
            self._bench.name_coil(run.card.number)
            run.hand = self._bench.hand
        run.winding.start()
        with self._lock:
            self._stack = stack.pop_all()
            self.run = run
        return run

    def hold(self, reason: str = "the hold key", leave: bool = False) -> bool:
        """Ask the spindle to stand. Only puts a request; True if there is a run to hear it."""
        run = self.run
        if run is None:
            return False
        if leave:
            self._leaving.set()
        run.winding.request(Hold("operator", reason, leave=leave))
        return True

    def finish(self) -> Outcome | None:
        """Complete the record of a run that has ended, and give the machine back. Safe to call twice."""
        with self._lock:
            run, stack = self.run, self._stack
            if run is None or stack is None:
                return None
            if run.outcome is None:
                try:
                    run.outcome = run.winding.close()
                finally:
                    self._stack = None
                    self.run = None
                    if self._bench is not None and self._bench.truth is not None:
                        truth = self._bench.truth()
                        run.truth = (
                            f"{truth.true_turns:.2f} turns, {truth.true_dcr_20c_ohm / 1000:.3f} kΩ at 20 °C"
                        )
                    stack.close()
            return run.outcome

    def leave(self, reason: str) -> Outcome | None:
        """Hold, wait until the spindle stands and the record is complete; the coil stays open."""
        run = self.run
        if run is None:
            return None
        if not self._leaving.is_set():
            self.hold(reason, leave=True)
        run.winding.wait(LEAVING_S)
        return self.finish()

    # ------------------------------------------------------------ the book

    def open_coils(self) -> tuple[CoilHead, ...]:
        """Coils that this bench left open; the running one is none of them."""
        with self._book() as book:
            heads = () if book is None else book.open_coils(self.profile.bench)
        running = self.run.card.number if self.run is not None else ""
        return tuple(head for head in heads if head.number != running)

    def _book(self) -> AbstractContextManager[Book | None]:
        """The book; None where no coil has been wound yet, also in one that was named."""
        named = self.shared.book
        if named is not None and not named.exists():
            return nullcontext()
        return book_if_any(self.shared)

    def page(self, number: int, outcome: str | None = None) -> Page:
        """One page of coils, the one begun last first."""
        with self._book() as book:
            if book is None:
                return Page((), 0, 0)
            total = book.count(outcome=outcome)
            heads = book.list(outcome=outcome, limit=PAGE, offset=number * PAGE)
            return Page(heads, total, number)

    def told(self, number: str) -> Told:
        """One coil, as it is shown. Raises BookError, RecordBroken."""
        from windctl.record.curve import review

        with book_to_read(self.shared) as book:
            head = book.find(number)
            events = list(book.events(number))
            curve = book.curve(number) if head.sealed else review(events).curve
        return _told(head, events, curve)

    def verify(self, number: str) -> VerifyReport:
        """Check one record against its digests."""
        with book_to_read(self.shared) as book:
            return book.verify(number)

    def export(self, number: str) -> Path:
        """Write the whole record beside the user, as JSON; where it went."""
        with book_to_read(self.shared) as book:
            record = {"format": 1, **dict(book.export(number))}
        path = Path.cwd() / f"{number}.json"
        path.write_text(json.dumps(record, ensure_ascii=False, indent=2), encoding="utf-8")
        return path


def _points(curve: tuple[CurvePoint, ...]) -> list[Point]:
    return [Point(one.turn, one.ohm_20c, one.final_ohm, _Z95 * one.final_sd) for one in curve]


def _told(head: CoilHead, events: list[Event], curve: tuple[CurvePoint, ...]) -> Told:
    from windctl.record.events import CoilStarted
    from windctl.tui.telling import tell, when

    started = events[0]
    if not isinstance(started, CoilStarted):
        raise RecordBroken(f"the record of coil {head.number} does not begin with its start")
    target = started.target
    points = _points(curve)
    last = points[-1] if points else None
    card = Card(
        number=head.number,
        recipe=head.recipe,
        machine=started.machine,
        target_kind=target.kind,
        target_value=target.value,
        tolerance_pct=target.tolerance_pct,
        most_turns=float(target.max_turns),
        planned_turns=started.planned_turns,
        planned_ohm=last.finish if last and last.finish else target.value,
        planned_u95=points[0].u95 or 0.0 if points else 0.0,
        depth_mm=0.0,
        batch=head.batch,
        of=head.of,
    )
    lines = []
    for event in events:
        text = tell(event, started.setup.counts_per_turn) if event.kind not in _DENSE else None
        if text is not None:
            lines.append((when(event), text))
    return Told(head, card, tuple(points), tuple(lines), started.machine)


_DENSE = ("status_heard", "reading_taken")
