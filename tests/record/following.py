"""A coil whose facts are fed by a test, every consequence followed and kept."""

from __future__ import annotations

from dataclasses import replace

from tests.record.samples import CPT, identity, reading, started, status
from windctl.protocol.messages import Cause
from windctl.protocol.messages import State as BoardState
from windctl.record.decide import Decision, decide
from windctl.record.ending import SETTLED_ENOUGH
from windctl.record.events import BoardGreeted, Event, GoGiven, ReadingTaken, StatusHeard
from windctl.record.fold import fold, start

FRESH_BOARD = identity(state=BoardState.DRIVES_OFF, coil_token=0, setup_crc=0, program=0, next=0)


class Coil:
    """Feeds facts, follows every consequence, and keeps all of them."""

    def __init__(self, first: Event) -> None:
        self.facts: list[Event] = []
        self.state = start()
        self.decision = Decision((), decide(start(), 0).wants)
        self.hear(first)

    def hear(self, *events: Event) -> list[Event]:
        """Facts in; the facts that follow out."""
        follows: list[Event] = []
        for event in events:
            self._fold(event)
            for _ in range(16):
                self.decision = decide(self.state, 0)
                if not self.decision.events:
                    break
                for consequence in self.decision.events:
                    self._fold(consequence)
                    follows.append(consequence)
            else:
                raise AssertionError("deciding does not come to an end")
        return follows

    def _fold(self, event: Event) -> None:
        self.facts.append(event)
        self.state = fold(self.state, event)


def ready(kind: str = "dcr_20c_ohm", value: float = 1000.0, mode: str = "live") -> Coil:
    """A coil whose board is powered and set up, with consent given: about to turn."""
    coil = Coil(started(kind, value, mode))
    coil.hear(BoardGreeted(0, FRESH_BOARD), StatusHeard(0, status(0)))
    coil.hear(GoGiven(0, 5, 10, "operator"))
    coil.hear(StatusHeard(0, status(100, state=BoardState.READY, cause=Cause.ARM, epoch=11)))
    return coil


def turning(turns: float = 100.0, **kwargs: object) -> Coil:
    coil = ready(**kwargs)  # type: ignore[arg-type]  # handed on as they are
    at = status(
        5000, state=BoardState.TURNING, cause=0, epoch=11, count=round(turns * CPT), speed=6667, next=100
    )
    coil.hear(StatusHeard(0, at))
    return coil


def at_rest(coil: Coil, turns: float, cause: Cause, epoch: int = 12) -> list[Event]:
    return coil.hear(
        StatusHeard(
            0,
            status(
                60_000, state=BoardState.HELD, cause=cause, epoch=epoch, count=round(turns * CPT), next=100
            ),
        )
    )


def measured(turn: float) -> float:
    """What an exact meter reads of it: leads of 0.5 ohm, 0.8 ohm to the contact, 0.7 K over the air."""
    return true_ohm(turn) * (1.0 + 0.00393 * 0.7) + 0.5 + 0.8


def true_ohm(turn: float) -> float:
    """A coil somewhat off the prior: 2 % more per turn."""
    return 1.02 * (0.65 * turn + 1.0e-5 * turn * turn)


def settle(coil: Coil, turn: float, ticks: int = 61_000) -> list[Event]:
    follows: list[Event] = []
    for i in range(SETTLED_ENOUGH + 2):
        if coil.state.finished or (follows and coil.decision.asks):
            break
        taken = reading(ticks + 250 * i, turn, measured(turn), resting=True)
        follows += coil.hear(ReadingTaken(0, taken))
        now = coil.state.status
        assert now is not None
        follows += coil.hear(StatusHeard(0, replace(now, ticks=ticks + 250 * i)))
    return follows
