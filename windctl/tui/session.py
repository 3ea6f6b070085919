"""What the interface does in the world: machine, book, runs. The only part of it that touches them.

Everything here may take a while and is called from threads of its own, except `hold`, which only puts a
request into the run's queue and may be called from anywhere, at any time.
"""

from __future__ import annotations

import threading
from collections.abc import Callable
from contextlib import ExitStack
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from windctl.desk.asked import Shared
from windctl.desk.books import book_to_read, book_to_write
from windctl.desk.numbers import grouped, ohm
from windctl.desk.simulated_leads import SimulatedLeads
from windctl.errors import RecordBroken
from windctl.run.requests import DryPass, Hold, ZeroContact
from windctl.tui import collector
from windctl.tui.before_words import First, Repeats
from windctl.tui.cards import card_for
from windctl.tui.pictures.curve import Point
from windctl.tui.records import Records, points_of
from windctl.tui.sitting import REAL_TIME
from windctl.tui.view import Card

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.book.heads import CoilHead
    from windctl.desk.bench import Bench
    from windctl.plan.by_hand import HandLay
    from windctl.plan.experience.supply import Supply
    from windctl.plan.growth import Growth
    from windctl.profile.model import MachineProfile
    from windctl.recipe.model import Recipe
    from windctl.recipe.orientation import Side
    from windctl.record.events import CoilStarted
    from windctl.run.outcome import Outcome
    from windctl.run.wind import Winding
    from windctl.tui.recipes import Listed, Preview

LEAVING_S = 45.0  # to see the spindle stand and the record complete
_Z95 = 1.959964


class Run:
    """A coil being wound, and what is drawn of it."""

    def __init__(
        self, winding: Winding, card: Card, growth: Growth, counts_per_turn: int, before: list[Point]
    ) -> None:
        self._counts_per_turn = counts_per_turn
        self.winding = winding
        self.card = card
        self.growth = growth
        self.lay_by_hand: HandLay | None = None  # where a hand guides the wire, and the turns are counted
        self.by_eye = False  # nobody counts: turns are read off a counter and typed
        self.before = before  # the curve of earlier runs of this coil
        self.outcome: Outcome | None = None
        self.truth: str = ""
        self.start_side: Side = "motor"  # on which the lay starts
        self.hand: Callable[[float], None] | None = None  # turns a simulated spindle
        self.leads: SimulatedLeads | None = None  # at a simulated contact

    @property
    def counts_per_turn(self) -> int:
        """Encoder counts in a turn of the spindle."""
        return self._counts_per_turn


class Session(Records):
    """One sitting at one machine, and the coil that is wound on it."""

    def __init__(self, shared: Shared, folders: list[Path] | None = None) -> None:
        super().__init__(shared)
        self._folders = folders
        self._lock = threading.Lock()
        self._leaving = threading.Event()
        self._stack: ExitStack | None = None
        self._bench: Bench | None = None
        self.run: Run | None = None

    # ------------------------------------------------------------ before

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

    def repeats(self, recipe: str, batch: str) -> Repeats:
        """The coil of this recipe that was begun last, and how far the batch is."""
        from windctl.record.events import CoilStarted

        with self._book() as book:
            if book is None:
                return Repeats()
            heads = book.list(recipe=recipe, limit=1)
            started = next(iter(book.events(heads[0].number)), None) if heads else None
            text = started.recipe_text if isinstance(started, CoilStarted) else ""
            return Repeats(heads[0] if heads else None, text, book.count(batch=batch) if batch else 0)

    # ------------------------------------------------------------ a coil

    def begin(self, preview: Preview, batch: str = "", of: int = 0, *, first: First | None = None) -> Run:
        """Open the machine, number the coil, and start its run with what is to be done on it first. Raises
        WindctlError; nothing is open then."""
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
            if first is not None and first.zero:
                winding.request(ZeroContact("operator", simulated_hand=bench.connect is not None))
            if first is not None and first.dry_pass:
                winding.request(DryPass("operator"))
            recipe = preview.recipe
            card = card_for(recipe.name, winding.number, bench.name, preview.plan, recipe.stop)
            card = replace(card, batch=batch, of=of, place=place, depth_mm=recipe.bobbin.flange_depth_mm)
            run = Run(winding, card, preview.growth, self.profile.spindle.counts_per_turn, [])
            return self._started(stack, run, recipe, bench.profile)

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
            before = points_of(review(events).curve)
            counts_per_turn = started.setup.counts_per_turn
            growth = growth_of(recipe, profile, plan)
            run = Run(winding, card, growth, counts_per_turn, before)
            return self._started(stack, run, recipe, profile)

    def _open(
        self,
        stack: ExitStack,
        recipe: Recipe,
        started: CoilStarted | None = None,
        profile: MachineProfile | None = None,
        supply: Supply | None = None,
    ) -> tuple[Bench, Book]:
        from windctl.desk.bench import open_bench

        self.close_bench()  # one port has one user
        shared = self.shared
        if self.simulated and shared.speed is None:
            shared = replace(shared, speed=REAL_TIME)
        profile = profile or self.profile
        bench = stack.enter_context(open_bench(shared, profile, self.simulated, recipe, started, supply))
        book = stack.enter_context(book_to_write(shared))
        self._bench = bench
        return bench, book

    def _started(self, stack: ExitStack, run: Run, recipe: Recipe, profile: MachineProfile) -> Run:
        from windctl.plan.by_hand import hand_lay

        self._leaving.clear()
        if profile.by_eye:
            run.by_eye = True
            run.card = replace(run.card, pass_turns=hand_lay(recipe).pass_turns)
        elif profile.guide.kind == "hand":
            run.lay_by_hand = hand_lay(recipe)
        run.start_side = recipe.coil.orientation.start_side
        if self._bench is not None:
            self._bench.name_coil(run.card.number)
            run.hand = self._bench.hand
            if self._bench.connect is not None:
                run.leads = SimulatedLeads(self._bench.connect)
        collector.set_aside()
        run.winding.start()
        with self._lock:
            self._stack = stack.pop_all()
            self.run = run
        return run

    def hold(self, reason: str = "the hold key", leave: bool = False) -> bool:
        """Ask the spindle to stand. Only puts a request; True if there is somebody to hear it."""
        run, bench = self.run, self.bench
        if bench is not None:
            bench.hold()
        if run is None:
            return bench is not None
        if leave:
            self._leaving.set()
        run.winding.request(Hold("operator", reason, leave=leave))
        return True

    def tidy(self) -> None:
        """The spindle has just come to rest, and nobody is kept waiting: a moment for the collector."""
        if self._lock.acquire(blocking=False):  # else the run is being ended, which does it, too
            try:
                if self.run is not None:
                    collector.set_aside()
            finally:
                self._lock.release()

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
                        really = ohm(truth.true_dcr_20c_ohm).replace("kohm", "kΩ").replace("ohm", "Ω")
                        run.truth = f"{grouped(truth.true_turns, 2)} turns, {really} at 20 °C"
                    stack.close()
                    collector.take_back()
            return run.outcome

    def leave(self, reason: str) -> Outcome | None:
        """Hold, wait until the spindle stands and the record is complete; the coil stays open."""
        self.close_bench()
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
