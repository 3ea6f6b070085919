"""A dry pass in one thread: facts, decisions and the conversation on one side, the board's twin and the plant
on the other, and between them a line that loses, flips, repeats and delays whole frames.

What is true is asked of the plant alone: where the guide's motor stands, and whether the spindle stood.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from random import Random

from tests.protocol.chaos import Chances, Way
from tests.run.winding import SHIPPED, here, order, with_stop
from windctl.errors import LinkLost as LineLost
from windctl.errors import MachineError
from windctl.machine.twin.signals import GUIDE_LOW_OK, Inputs, Outputs
from windctl.machine.virtual.bench import virtual_bench
from windctl.profile.builtin import VIRTUAL
from windctl.profile.model import MachineProfile
from windctl.protocol.conversation import Conversation
from windctl.protocol.messages import Capability
from windctl.protocol.messages import State as BoardState
from windctl.record.decide import Decision, decide
from windctl.record.events import Event, LinkLost, Resumed, StatusHeard
from windctl.record.fold import fold, replay, start
from windctl.run.answers import answer
from windctl.run.requests import Clear, DryPass, Go, Hold, Nudge, Request, Seen
from windctl.run.runner import _fact
from windctl.run.wind import _started

COIL = with_stop(SHIPPED, turns=400, tolerance_pct=2)
GOOD = Chances(lost=0.0, flipped=0.0, repeated=0.0, delayed=0.0)
BAD = Chances(lost=0.12, flipped=0.08, repeated=0.25, delayed=0.2, latest_ticks=300)
HOST_EVERY = 5  # ticks
LIMIT = 120_000  # ticks of one wait
BY = "operator"


def with_play(mm: float) -> MachineProfile:
    """The virtual machine, its guide's drive having so much play."""
    return VIRTUAL.model_copy(update={"guide": VIRTUAL.guide.model_copy(update={"backlash_mm": mm})})


class Showing:
    """One coil before its first turn. Every tick is watched: the spindle stands until somebody has said go to
    it, and the motor never goes further than the limits of nudging allow."""

    def __init__(self, chances: Chances = GOOD, seed: int = 1, profile: MachineProfile = VIRTUAL) -> None:
        recipe, wanted = order(COIL, profile)
        self.bench = virtual_bench(recipe, profile, 1)
        self.board, self.plant = self.bench.board, self.bench.plant
        self.board.capabilities &= ~int(Capability.VIRTUAL)
        self.random = Random(seed)
        self.counts: Counter[str] = Counter()
        self._down, self._up = (Way(self.random, chances, self.counts) for _ in range(2))
        self.dead = False  # the line
        self.switch_open = False
        self.tick = 0
        self._inputs, self._outputs = Inputs(), Outputs()
        self.talk = Conversation(lambda: self.random.getrandbits(32))
        self.facts: list[Event] = []
        self.state = start()
        self.decision: Decision = decide(self.state, 0)
        self.turned_from: int | None = None  # the motor's place as the spindle began to turn
        self.seen_at: dict[str, int] = {}
        self.seen_through: dict[str, int] = {}  # of the last pass, if nothing broke it off
        self.per_mm = profile.guide.steps_per_mm
        self.record(_started(wanted, here()))
        self.say(DryPass(BY))

    # ------------------------------------------------------------ the truth

    @property
    def motor(self) -> int:
        """Steps of the guide's motor from where the guide was put."""
        return self.plant.guide.motor

    @property
    def shift(self) -> int:
        """How far the board's datum really is from where the guide was put."""
        return self.motor - self.board.guide

    @property
    def far(self) -> int:
        """The program's far turn-round."""
        assert self.state.started is not None
        return self.state.started.setup.guide_max

    def put_by_hand(self) -> None:
        """Somebody puts the guide to its start."""
        self.plant.guide.set_to(0)

    # ------------------------------------------------------------ time

    def record(self, *events: Event) -> None:
        for event in events:
            self._fold(event)
            for _ in range(16):
                self.decision = decide(self.state, self.tick)
                if not self.decision.events:
                    break
                for follows in self.decision.events:
                    self._fold(follows)
            else:
                raise AssertionError("deciding does not come to an end")

    def _fold(self, event: Event) -> None:
        before = self.state
        self.facts.append(event)
        self.state = fold(before, event)
        if self.state.pass_agreed is not before.pass_agreed:
            broken_off = self.state.misplaced or self.state.guide_lost
            through = before.pass_agreed is not None and not broken_off
            self.seen_through = dict(self.seen_at) if through else {}

    def say(self, request: Request) -> str:
        """Ask something of the run; what it says."""
        met = answer(request, self.state, self.decision, self.tick, leaving=False)
        self.record(*met.facts)
        return met.says

    def run(self, ticks: int) -> None:
        for _ in range(ticks):
            self._step()

    def _step(self) -> None:
        self.tick += 1
        inputs, outputs, board = self._inputs, self._outputs, self.board
        inputs.received = b"" if self.dead else self._down.pull(self.tick)
        before = self.motor
        board.tick(inputs, outputs)
        self.plant.step(outputs, inputs)
        if self.switch_open:
            inputs.pins &= ~GUIDE_LOW_OK
        self._watch(before)
        if outputs.sent and not self.dead:
            self._up.put(outputs.sent, self.tick)
        if self.tick % HOST_EVERY == 0:
            self._host()

    def _watch(self, before: int) -> None:
        if self.board.state == BoardState.TURNING:
            if self.turned_from is None:
                self.turned_from = before
                assert self.state.let_go, "it turns, and nobody said go"
            return
        if self.turned_from is None:
            assert self.board.count == 0, "the spindle moved"
            low = self.state.started.setup.guide_min if self.state.started is not None else 0
            most = round(3.0 * self.per_mm)
            assert low - most <= self.motor <= self.far + most, "the guide went too far"

    def _host(self) -> None:
        now = self.tick / 1000.0
        heard = b"" if self.dead else self._up.pull(self.tick)
        for message in self.talk.receive(heard, now):
            fact = _fact(message, self.tick)
            if fact is not None:
                self.record(fact)
        try:
            data = self.talk.advance(self.decision.wants, now)
        except (LineLost, MachineError) as error:
            self.counts["links lost"] += 1
            self.dead = False
            self.record(LinkLost(self.tick, str(error)), Resumed(0, "", "a test", "0"))
            self.talk = Conversation(lambda: self.random.getrandbits(32))
            return
        if data and not self.dead:
            self._down.put(data, self.tick)

    # ------------------------------------------------------------ what a person does

    def until(self, what: Callable[[], bool]) -> None:
        end = self.tick + LIMIT
        while not what():
            assert self.tick < end, (self.decision.asks, self.decision.blocked, self.state.shown)
            self._step()

    def asked(self, *what: str) -> str:
        """Wait until one of these is asked."""
        self.until(lambda: self.decision.asks in what)
        assert self.decision.asks is not None
        return self.decision.asks

    def look(self) -> None:
        """Agree to passes until the guide stands to be looked at, putting right what is asked for."""
        while True:
            match self.asked("look", "pass", "clear", "go"):
                case "look":
                    return
                case "go":
                    self.say(DryPass(BY))
                case "pass":
                    self._agree()
                case "clear":
                    self.clear()

    def clear(self) -> None:
        """Look to the cause of a trip; a guide that left its way is put back by hand."""
        if self.state.guide_lost:
            self.put_by_hand()
        self.switch_open = False
        self.run(100)
        self.say(Clear(BY))
        self.until(lambda: self.decision.asks != "clear" or self.state.clear is None)

    def _agree(self) -> None:
        if self.state.guide_lost:
            self.put_by_hand()
        self.say(Go(BY))

    def nudge(self, mm: float) -> str:
        return self.say(Nudge(BY, mm))

    def seen(self) -> None:
        """Confirm the end; where the motor then truly stands is kept."""
        self.seen_at[self.state.shown.end] = self.motor
        self.say(Seen(BY))

    def hold(self) -> None:
        self.say(Hold(BY, "the hold key"))

    def limit_switch(self) -> None:
        """A limit switch of the guide opens, until somebody has looked to it."""
        self.switch_open = True

    def killed(self, forgets: int) -> None:
        """windctl dies, and with it what the board said in its last milliseconds; another run takes up."""
        last = self.tick - forgets
        self.facts = [fact for fact in self.facts if not isinstance(fact, StatusHeard) or fact.at_ms <= last]
        self.state = replay(self.facts)
        self.talk = Conversation(lambda: self.random.getrandbits(32))
        self.record(Resumed(0, "", "a test", "0"))

    def reset(self) -> None:
        """The board's power goes and comes back."""
        self.board.reboot()
        self._outputs.rate = self._outputs.guide_steps = 0
        self._outputs.drive_enable = self._outputs.guide_enable = 0

    def wind(self) -> None:
        """Say go until it turns."""
        while self.turned_from is None:
            match self.asked("go", "pass", "look", "clear"):
                case "go":
                    self.say(Go(BY))
                    self.until(lambda: self.turned_from is not None or self.decision.asks is not None)
                case "pass":
                    self._agree()
                case "look":
                    self.seen()
                case "clear":
                    self.clear()

    def told_the_same(self) -> None:
        """The record alone leads to the same state."""
        assert replay(self.facts) == self.state
