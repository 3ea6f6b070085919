"""One coil from plan to seal, and going on with one: puts book, journal, runner and port together.

A `Winding` is a run in progress. Whoever starts one looks at it (`look`), answers what it asks for
(`request`), waits for its end (`wait`) and closes it (`close`), which makes the last facts durable and seals
a finished coil.
"""

from __future__ import annotations

import threading
import zlib
from collections.abc import Callable
from contextlib import suppress
from dataclasses import dataclass, replace

from windctl import __version__
from windctl.book.book import Book
from windctl.book.writer import CoilWriter
from windctl.errors import BookError, MachineError, RecordBroken, UsageError
from windctl.forecast.waiting import Waiting, waiting
from windctl.machine.ports import Port
from windctl.plan.board_setup import board_setup
from windctl.plan.model import Plan
from windctl.profile.model import MachineProfile
from windctl.protocol.messages import Identity
from windctl.recipe.model import Recipe
from windctl.record.addenda import CoilTaught
from windctl.record.curve import review
from windctl.record.entries import unpack
from windctl.record.events import CoilStarted, Event, Resumed, Target
from windctl.record.fold import State, fold, replay, start
from windctl.record.lesson import lesson_of
from windctl.record.program import stored
from windctl.record.summary import CoilSummary, summarise
from windctl.record.trace import trace_digest
from windctl.run.counter import NEVER
from windctl.run.journal import LINGER_S, Journal
from windctl.run.outcome import Outcome
from windctl.run.outlook import Ahead
from windctl.run.requests import Request
from windctl.run.runner import Ended, Runner
from windctl.run.snapshot import Snapshot

MOST_GUIDE_PACE = 4000  # steps/s at which a board moves the guide by itself


@dataclass(frozen=True, slots=True)
class Here:
    """What only the outermost shell knows: clock, chance, and who stands at the bench."""

    wall_time: Callable[[], str]  # ISO 8601 with offset
    year: int
    coil_id: str  # unique, for a new coil
    nonces: Callable[[], int]  # u32, a new one every time
    operator: str


@dataclass(frozen=True, slots=True)
class Order:
    """What is to be wound, and for what."""

    recipe: Recipe
    recipe_text: str
    plan: Plan
    profile: MachineProfile
    machine: str  # the profile's name; of a simulated machine with its plant seed
    batch: str = ""
    of: int = 0


class Winding:
    """A run in progress. Its thread starts with `start`."""

    def __init__(
        self,
        book: Book,
        writer: CoilWriter,
        port: Port,
        state: State,
        here: Here,
        steps_per_mm: float,
        first: tuple[Event, ...] = (),
        at_turn: float | None = None,
    ) -> None:
        self._book = book
        self._writer = writer
        self._here = here
        self._journal = Journal(writer, LINGER_S if port.simulated else 0.0)
        self._runner = Runner(
            port,
            self._journal,
            state,
            nonces=here.nonces,
            steps_per_mm=steps_per_mm,
            first=first,
            at_turn=at_turn,
        )
        self._thread = threading.Thread(target=self._runner.run, name="windctl-runner")

    @property
    def number(self) -> str:
        """The coil's number."""
        return self._writer.number

    @property
    def identity(self) -> Identity | None:
        """The board, once it has answered."""
        return self._runner.greeted

    def start(self) -> None:
        """Begin: greet the board, set it up, and ask for what is needed."""
        self._thread.start()

    def look(self) -> Snapshot:
        """The latest picture."""
        return self._runner.look()

    def outlook(self) -> tuple[Ahead, ...]:
        """The forecast from here to the stop."""
        return self._runner.outlook()

    def facts(self, after: int = 0) -> tuple[Event, ...]:
        """The rare facts of this run in order, without the first `after` of them."""
        return self._runner.facts(after)

    def request(self, request: Request) -> None:
        """Ask something of the run; `windctl.run.requests` has what there is."""
        self._runner.request(request)

    def wait(self, timeout_s: float) -> Ended | None:
        """How the run ended, or None if it has not yet."""
        return self._runner.wait(timeout_s)

    def close(self) -> Outcome:
        """Make the last facts durable, seal the coil if it is finished, and say how it went.

        A book that cannot be written or read is part of the outcome, as its `error`: whether the spindle was
        seen standing must not get lost over it. Raises RecordBroken when the record does not tell what
        happened.
        """
        ended = self._runner.wait(60.0)
        self._thread.join(60.0)
        if ended is None:
            raise MachineError("the run did not end within 60 s: use the hardware stop")
        self._runner.flush()
        failure: BookError | None = None
        try:
            self._journal.close()
        except BookError as error:
            failure = error
        try:
            return self._sealed(ended, failure)
        except BookError as error:
            unread = summarise(replace(ended.state, finished=None))
            return self._outcome(ended, failure or error, unread)

    def _sealed(self, ended: Ended, failure: BookError | None) -> Outcome:
        """The outcome as the record tells it, and sealed if it tells of an end."""
        entries = list(self._book.entries(self.number))
        events = list(unpack(entries))
        seen = review(events)
        trace = trace_digest(entries)
        if failure is None and seen.state != ended.state:
            raise RecordBroken(
                f"the record of coil {self.number} does not tell what happened: nothing is sealed"
            )
        summary = summarise(seen.state)
        if seen.state.finished is not None:
            head = self._writer.seal(summary, seen.curve, trace, self._here.wall_time())
            self._teach(events, head.bench)
        else:
            head = self._book.find(self.number)
        return self._outcome(ended, failure, summary, trace, head.record_digest)

    def _teach(self, events: list[Event], bench: str) -> None:
        """Write down what the coil teaches. Where the book does not take it any more, nothing is lost: the
        coil is sealed, and the lesson is read from its record whenever it is missing."""
        lesson = lesson_of(events, bench)
        if lesson is not None:
            with suppress(BookError):
                self._book.amend(self.number, CoilTaught(__version__, lesson))

    def _outcome(
        self,
        ended: Ended,
        failure: BookError | None,
        summary: CoilSummary,
        trace: str = "",
        record: str = "",
    ) -> Outcome:
        left, why = ended.left, ended.why
        if failure is not None and left in ("finished", "held"):
            left, why = "failed", str(failure)
        return Outcome(
            number=self.number,
            coil_id=self._writer.id,
            left=left,
            why=why,
            summary=summary,
            trace_digest=trace,
            record_digest=record,
            error=ended.error or failure,
            waiting=_waiting(ended.state),
        )


def _waiting(state: State) -> Waiting | None:
    """Of a finished coil that was read at rest."""
    if state.finished is None or state.estimate is None or state.reading is None or not state.reading.resting:
        return None
    return waiting(state.estimate, state.turns, state.reading.celsius)


def begin(order: Order, book: Book, port: Port, here: Here) -> Winding:
    """Give the coil a number, record what it stands on, and be ready to `start`.

    Raises BookError, PlanRefused.
    """
    writer = book.begin_coil(order.profile.bench, here.year, _started(order, here))
    state = fold(start(), writer.started)
    return Winding(book, writer, port, state, here, order.profile.guide.steps_per_mm)


def go_on(
    coil: str,
    book: Book,
    port: Port,
    here: Here,
    at_turn: float | None = None,
) -> Winding:
    """Take an open coil up where its record ends.

    `at_turn` is the turn as the operator counted it, for a board that no longer knows.
    Raises BookError, RecordBroken, UsageError for a turn outside the coil.
    """
    writer = book.reopen(coil)
    try:
        started = writer.started
        _check_turn(at_turn, started)
        state = replay(book.events(coil))
        profile = MachineProfile.model_validate_json(started.profile_json)
        resumed = Resumed(0, here.wall_time(), here.operator, __version__)
        return Winding(book, writer, port, state, here, profile.guide.steps_per_mm, (resumed,), at_turn)
    except BaseException:
        writer.close()
        raise


def _check_turn(at_turn: float | None, started: CoilStarted) -> None:
    most = started.total_counts / started.setup.counts_per_turn
    if started.counter == "read":
        most *= NEVER  # hands overshoot, and no board stopped them
    if at_turn is not None and not 0.0 <= at_turn <= most:
        raise UsageError(f"--at-turn is {at_turn:g} turns, outside this coil's 0 to {most:g} turns")


def _guide_pace(profile: MachineProfile) -> int:
    """Steps/s that the guide takes from rest without a ramp, within what a board issues."""
    guide = profile.guide
    return max(1, min(MOST_GUIDE_PACE, int(guide.start_stop_mm_per_s * guide.steps_per_mm)))


def _started(order: Order, here: Here) -> CoilStarted:
    recipe, plan, profile = order.recipe, order.plan, order.profile
    left = plan.learnt.left
    token = zlib.crc32(here.coil_id.encode())
    stop = recipe.stop
    turns_target = stop.turns is not None
    return CoilStarted(
        coil_id=here.coil_id,
        number="",
        wall_time=here.wall_time(),
        operator=here.operator,
        version=__version__,
        recipe_name=recipe.name,
        recipe_text=order.recipe_text,
        recipe_digest=recipe.digest,
        profile_json=profile.canonical_json(),
        machine=order.machine,
        readings_mode=profile.readings.mode,
        program_digest=plan.program.digest,
        program_id=plan.program.id32,
        program_packed=stored(plan.program.packed()),
        total_counts=plan.program.total_counts,
        setup=board_setup(recipe, profile, plan.program, token),
        guide_pace=_guide_pace(profile),
        pace=plan.pace,
        prior=plan.prior,
        target=Target(
            kind="turns" if turns_target else "dcr_20c_ohm",
            value=float(plan.target_value),
            tolerance_pct=stop.tolerance_pct,
            min_turns=stop.min_turns or 1,
            max_turns=int(plan.program.turns)
            if turns_target
            else (stop.max_turns or int(plan.program.turns)),
        ),
        planned_turns=float(plan.turns),
        spool=plan.learnt.spool,
        batch=order.batch,
        of=order.of,
        basis=plan.basis,
        spool_left_m=None if left is None else left.metres,
        spool_left_sd_m=None if left is None else left.sd,
        counter=profile.spindle.counter,
    )
