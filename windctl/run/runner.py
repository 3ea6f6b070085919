"""The runner: the one thread that owns the port and alone decides.

Each round it reads what came, turns it into facts, folds them, decides, hands the facts to the journal, and
lets the conversation write what follows. Consents reach the conversation only when they are durable; a hold
goes out before it is recorded. The beat goes out only while the journal is healthy: if this process, its
record or its line dies, the board stops by itself.
"""

from __future__ import annotations

import queue
import threading
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

from windctl.errors import BookError, LinkLost, RunFailed, WindctlError
from windctl.machine.ports import Port
from windctl.protocol.conversation import Conversation
from windctl.protocol.messages import Capability, Cause, Identity, Message, Reading, Refused, Status
from windctl.protocol.wants import Wants
from windctl.record.consent import declined
from windctl.record.decide import Decision, decide
from windctl.record.entries import Packer
from windctl.record.events import (
    BEFORE_ACTING,
    DENSE,
    BoardGreeted,
    ClearGiven,
    CommandRefused,
    CountCorrected,
    Event,
    GoGiven,
    HoldRequested,
    PassAgreed,
    ReadingTaken,
    StatusHeard,
)
from windctl.record.events import LinkLost as LinkLostEvent
from windctl.record.fold import Fit, State, fold
from windctl.record.taking_back import second_thoughts
from windctl.run.answers import answer
from windctl.run.journal import MOST_WAITING, TOO_OLD_S, Journal
from windctl.run.outlook import Ahead, outlook
from windctl.run.requests import Clear, End, Go, Hold, Note, Request
from windctl.run.snapshot import Snapshot, snapshot
from windctl.run.suits import check_board, check_refusal

__all__ = ["Clear", "End", "Ended", "Go", "Hold", "Note", "Request", "Runner"]

WAIT_S = 0.010  # the longest the runner listens before it looks up again
UNPOWERED_S = 0.050  # the same where there is no board and so nothing that could be held
LAST_HOLD_S = 5.0  # how long a failing run tries to see the spindle stand
DURABLE_S = 30.0  # how long a simulated run waits for the disk
ASKED_S = 0.005  # a simulated machine is in no hurry while a person is asked: ten times the real pace
PAUSE_S = 1.5  # two rounds so far apart: this process did not run, and the board may have stopped by itself


@dataclass(frozen=True, slots=True)
class Ended:
    """How a run ended: the last state, and why it went no further where the coil is not finished.

    `left`: "finished", "held" (asked to leave; the spindle was seen standing), "unconfirmed" (asked to leave;
    it was not), "turn wanted" (the board does not know where the coil stands), "failed".
    """

    state: State
    left: str
    why: str
    error: WindctlError | None = None


class Runner:
    """One coil on one port. `run` is the thread's body; the other methods are for everybody else."""

    def __init__(
        self,
        port: Port,
        journal: Journal,
        state: State,
        *,
        nonces: Callable[[], int],
        steps_per_mm: float,
        first: Sequence[Event] = (),
        at_turn: float | None = None,
    ) -> None:
        self._port = port
        self._journal = journal
        self._state = state
        self._talk = Conversation(nonces)
        self._steps_per_mm = steps_per_mm
        self._first = tuple(first)
        self._at_turn = at_turn
        self._packer = Packer()
        self._requests: queue.SimpleQueue[Request] = queue.SimpleQueue()
        self._decision = Decision((), Wants())
        self._picture = (state, self._decision)
        self._leaving: Hold | None = None
        self._answers = 0
        self._answer = ""
        self._consent_ticket = 0
        self._started_at = 0.0
        self._spoke_at = 0.0
        self._ended: Ended | None = None
        self._done = threading.Event()
        self._begun = False
        self._rare: list[Event] = []

    # ------------------------------------------------------------ for other threads

    def request(self, request: Request) -> None:
        """Put a request; the runner takes it up within one round."""
        self._requests.put(request)

    def look(self) -> Snapshot:
        """The latest picture of the run."""
        picture = snapshot(*self._picture, self._steps_per_mm)
        return replace(picture, answers=self._answers, answer=self._answer)

    def outlook(self) -> tuple[Ahead, ...]:
        """The forecast from here to the stop."""
        return outlook(self._picture[0])

    def facts(self, after: int = 0) -> tuple[Event, ...]:
        """The rare facts of this run in order, without the first `after` of them."""
        return tuple(self._rare[after:])

    @property
    def greeted(self) -> Identity | None:
        """The board's identity, once it has answered."""
        return self._picture[0].identity

    def wait(self, timeout_s: float) -> Ended | None:
        """How the run ended, or None if it has not within `timeout_s`."""
        return self._ended if self._done.wait(timeout_s) else None

    # ------------------------------------------------------------ the thread

    def run(self) -> None:
        """Wind until the coil is finished, somebody leaves, or something fails. Never raises."""
        try:
            self._ended = self._wind()
        except WindctlError as error:
            self._ended = self._fail(error)
        except Exception as error:  # unknown: stop the motion, close the record, and be seen
            self._ended = self._fail(RunFailed(f"unexpected {type(error).__name__}: {error}"))
            raise
        finally:
            self._port.close()
            self._done.set()

    def _wind(self) -> Ended:
        self._started_at = self._spoke_at = self._port.now()
        self._record(self._first)
        self._settle_decision()
        while True:
            for event in self._listen():
                self._record((event,))  # one by one: each fact may have a consequence before the next
                self._check_suits(event)
                self._settle_decision()
            self._meet_requests()
            ended = self._over()
            self._speak()
            if ended is not None:
                return ended

    def _listen(self) -> list[Event]:
        wait = UNPOWERED_S if self._state.by_eye else WAIT_S
        if self._port.simulated:  # nobody else needs the time: sleep until something is due
            wait = max(0.001, min(0.05, self._talk.next_due(self._port.now()) - self._port.now()))
        data = self._port.read(wait) if self._begun else b""
        self._begun = True
        if not data:
            return []
        at_ms = self._at_ms()
        facts: list[Event] = []
        for message in self._talk.receive(data, self._port.now()):
            fact = _fact(message, at_ms)
            if fact is not None:
                facts.append(fact)
                if isinstance(fact, BoardGreeted) and self._at_turn is not None:
                    facts.append(CountCorrected(at_ms, self._at_turn, "operator", "given when resuming"))
                    self._at_turn = None
        return facts

    def _check_suits(self, event: Event) -> None:
        started = self._state.started
        if isinstance(event, BoardGreeted) and started is not None:
            check_board(started, event.identity)
        elif isinstance(event, CommandRefused):
            check_refusal(event.refused)
            self._answer_with(declined(event.refused) or "")

    def _meet_requests(self) -> None:
        person_is_asked = self._port.simulated and self._decision.asks is not None
        while True:
            try:
                request = self._requests.get(timeout=ASKED_S if person_is_asked else 0.0)
            except queue.Empty:
                return
            person_is_asked = False
            if isinstance(request, Hold) and request.leave:
                self._leaving = request
            met = answer(
                request, self._state, self._decision, self._at_ms(), leaving=self._leaving is not None
            )
            for fact in met.facts:
                self._record((fact,))
                self._settle_decision()
            self._answer_with(met.says)

    def _answer_with(self, words: str) -> None:
        if words:
            self._answer = words
            self._answers += 1

    def _settle_decision(self) -> None:
        """Decide, record and fold until nothing more follows."""
        for _ in range(16):
            decision = decide(self._state, self._at_ms())
            self._decision = decision
            events = decision.events or self._consent_of_virtual(decision)
            if not events:
                self._picture = (self._state, decision)
                return
            self._record(events)
        raise RunFailed("the facts of this coil contradict each other: deciding does not come to an end")

    def _consent_of_virtual(self, decision: Decision) -> tuple[Event, ...]:
        """A simulated machine hurts nobody: it goes where a person would have agreed without a thought."""
        state, permission = self._state, self._state.permission
        if state.refused is not None:  # what the board declines once is not asked of it again and again
            return ()
        if (
            state.identity is None
            or permission is None
            or self._leaving is not None
            or state.hold is not None
            or second_thoughts(state)
            or state.contact_off  # somebody has the leads in hand, and says when the contact is on the wire
            or (state.hands is not None and state.hands.by != "windctl")  # a check is over by itself
        ):
            return ()
        if not state.identity.capabilities & Capability.VIRTUAL:
            return ()
        if decision.asks == "pass" and not state.guide_lost:
            return (PassAgreed(self._at_ms(), permission.boot, permission.epoch, "virtual"),)
        if decision.asks == "clear" and state.fit is Fit.FRESH:
            return (ClearGiven(self._at_ms(), permission.boot, permission.epoch, "virtual"),)
        by_itself = state.held is None or state.held.cause in (Cause.STOP_POINT, Cause.QUEUE_END)
        if decision.asks == "go" and (by_itself or not state.consented_since_greeting):
            return (GoGiven(self._at_ms(), permission.boot, permission.epoch, "virtual"),)
        return ()

    def _over(self) -> Ended | None:
        state = self._state
        if state.finished is not None:
            return Ended(state, "finished", state.finished.reason)
        if self._decision.asks == "turn" and self._leaving is None:
            return Ended(state, "turn wanted", self._decision.blocked or "")
        if self._leaving is not None and state.standing and not state.turning:
            return Ended(state, "held", self._leaving.reason)
        return None

    def _speak(self) -> None:
        now = self._port.now()
        journal = self._journal
        if journal.failure is not None:
            raise journal.failure
        if self._port.simulated:
            if not journal.is_durable(self._consent_ticket) or journal.waiting > MOST_WAITING:
                self._wait_for_disk()
            self._say(self._decision.wants, now)
            return
        self._mind_pause(now)
        wants = self._decision.wants
        if not journal.is_durable(self._consent_ticket):
            wants = replace(wants, armed=None, go=None, guide=None, datum=None, clear_trip=None)
        if journal.oldest_s() > TOO_OLD_S:
            self._say(replace(wants, beat=False, hold=True), now)
            if self._state.hold is None:
                self._hold_because(f"the record is {TOO_OLD_S:.0f} s behind")
            return
        self._say(wants, now)

    def _say(self, wants: Wants, now: float) -> None:
        data = self._talk.advance(wants, now)
        if data:
            self._port.write(data)
        self._spoke_at = now

    def _mind_pause(self, now: float) -> None:
        """This process may have stood still: suspended, stopped, or its computer busy with something else."""
        pause = now - self._spoke_at
        if pause < PAUSE_S:
            return
        self._talk.paused(pause)
        self._journal.paused(pause)
        if self._state.turning or self._state.consent is not None:
            self._hold_because(f"this computer stood still for {pause:.1f} s")

    def _hold_because(self, reason: str) -> None:
        self._record((HoldRequested(self._at_ms(), "windctl", reason),))
        self._settle_decision()

    def _wait_for_disk(self) -> None:
        ticket = self._journal.put((), urgent=True)
        if not self._journal.wait(ticket, DURABLE_S):
            raise self._journal.failure or BookError(
                f"the coil book did not take a fact within {DURABLE_S:.0f} s; look to its disk"
            )

    def _record(self, events: Sequence[Event]) -> None:
        """Fold facts and hand them to the journal, in this order."""
        if not events:
            return
        state = self._state
        for event in events:
            state = fold(state, event)
        self._state = state
        self._rare.extend(event for event in events if not isinstance(event, DENSE))
        entries = self._packer.add(events)
        urgent = any(not isinstance(event, StatusHeard | ReadingTaken) for event in events)
        ticket = self._journal.put(entries, urgent=urgent)
        if any(isinstance(event, BEFORE_ACTING) for event in events):
            self._consent_ticket = ticket

    def _fail(self, error: WindctlError) -> Ended:
        """Hold, see the spindle stand if the line allows it, record why, and end."""
        stands = False
        may_turn = self._state.turning or self._state.consent is not None
        if isinstance(error, LinkLost):
            self._record((LinkLostEvent(self._at_ms(), str(error)),))
        else:
            self._record((HoldRequested(self._at_ms(), "windctl", str(error)),))
            stands = self._hold_to_rest()
        left = "failed" if stands or not may_turn else "unconfirmed"
        return Ended(self._state, left, str(error), error)

    def _hold_to_rest(self) -> bool:
        """Ask for a hold until the board says that it stands; without beats, it also stops by itself."""
        until = self._port.now() + LAST_HOLD_S
        try:
            while self._port.now() < until:
                self._port.write(self._talk.advance(Wants(hold=True), self._port.now()))
                for message in self._talk.receive(self._port.read(WAIT_S), self._port.now()):
                    fact = _fact(message, self._at_ms())
                    if isinstance(fact, StatusHeard):
                        self._record((fact,))
                        if self._state.standing:
                            return True
        except WindctlError:
            return False  # the first error is the one to show; the board stops for want of beats
        return False

    def _at_ms(self) -> int:
        return round((self._port.now() - self._started_at) * 1000.0)

    def flush(self) -> None:
        """Hand the last unfinished chunk to the journal. After `run` has returned."""
        self._journal.put(self._packer.flush(), urgent=True)


def _fact(message: Message, at_ms: int) -> Event | None:
    match message:
        case Status():
            return StatusHeard(at_ms, message)
        case Reading():
            return ReadingTaken(at_ms, message)
        case Identity():
            return BoardGreeted(at_ms, message)
        case Refused():
            return CommandRefused(at_ms, message)
        case _:
            return None
