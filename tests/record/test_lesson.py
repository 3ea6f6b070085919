"""What a coil's record teaches, and which coils teach nothing."""

from __future__ import annotations

from dataclasses import replace

import pytest

from tests.plan.experience.lots import basis
from tests.record.following import FRESH_BOARD, Coil, at_rest, settle, true_ohm, turning
from tests.record.samples import started, status
from windctl.plan.experience.lesson import Resistance
from windctl.plan.prior import Prior
from windctl.protocol.messages import Cause
from windctl.protocol.messages import State as BoardState
from windctl.record.events import (
    AlarmRaised,
    BoardGreeted,
    CoilFinished,
    CoilStarted,
    EndRequested,
    Event,
    GoGiven,
    StatusHeard,
    WireChanged,
)
from windctl.record.lesson import lesson_of

# Figures of the samples' coil: 0.65 ohm a turn, growing by 2e-5.
BASIS = replace(
    basis(),
    ohm_per_m=5.0,
    perimeter_mm=130.0,
    build_per_turn_mm=2.0e-5 / (2 * 3.141592653589793 * 5.0e-3),
    crown=1.0,
)


def wound(target: float = 1000.0) -> list[Event]:
    """A coil read at rest at its end."""
    coil = turning(value=target)
    assert coil.state.stop_point is not None
    at_rest(coil, coil.state.stop_point / 400, Cause.STOP_POINT)
    settle(coil, coil.state.stop_point / 400)
    return finished(coil)


def finished(coil: Coil) -> list[Event]:
    first = coil.facts[0]
    assert isinstance(first, CoilStarted)
    facts = [replace(first, basis=BASIS, spool="s1"), *coil.facts[1:]]
    if not isinstance(facts[-1], CoilFinished):
        turns = coil.state.turns
        facts.append(
            CoilFinished(0, "finished", "for the test", coil.state.count, turns, 1000.0, 5.0, "within")
        )
    return facts


def test_the_resistance_as_its_meter_shows_it() -> None:
    facts = wound()
    lesson = lesson_of(facts, "b1")
    assert lesson is not None
    assert (lesson.coil, lesson.bench, lesson.spool, lesson.basis) == ("b1-2026-0001", "b1", "s1", BASIS)
    (ohm, *_) = lesson.measured
    assert isinstance(ohm, Resistance)
    assert ohm.ohm == pytest.approx(true_ohm(lesson.turns), rel=2e-3)
    # leads 0.3 ohm, warmth 0.7 K at 0.393 % each (IEC 60028); the meter's gain is not among them
    assert ohm.rel == pytest.approx(((0.3 / 1000) ** 2 + (0.7 * 0.00393) ** 2) ** 0.5, rel=0.25)
    assert lesson.meter_rel == pytest.approx((0.003**2 + 0.00196**2 + 0.5 * 0.00275**2) ** 0.5, rel=0.01)


def test_what_was_believed_before_changes_nothing() -> None:
    facts = wound()
    first = facts[0]
    assert isinstance(first, CoilStarted)
    prior: Prior = replace(first.prior, ohm_per_turn=0.7, var_ohm_per_turn=1e-10)
    again = lesson_of([replace(first, prior=prior), *facts[1:]], "b1")
    assert again == lesson_of(facts, "b1")


def test_which_coils_teach_nothing() -> None:
    facts = wound()
    lesson = lesson_of(facts, "b1")
    assert lesson is not None and lesson.measured
    blank = replace(lesson, measured=())
    end = facts[-1]
    assert isinstance(end, CoilFinished)
    stopped = [*facts[:-1], EndRequested(0, "operator", "enough"), replace(end, outcome="stopped")]
    assert lesson_of(stopped, "b1") == blank
    two_spools = [*facts[:-1], WireChanged(0, 500.0, "s2", "operator"), end]
    assert lesson_of(two_spools, "b1") == blank
    older = facts[0]
    assert isinstance(older, CoilStarted)
    assert lesson_of([replace(older, basis=None), *facts[1:]], "b1") is None
    assert lesson_of([], "b1") is None


def test_a_simulated_coil_says_so() -> None:
    lesson = lesson_of(wound(), "b1")
    assert lesson is not None
    assert lesson.simulated  # the samples' board says that it is simulated


def turns_with(left_m: float | None, *joined: Event) -> list[str]:
    """Alarms of a coil that turns, is held, and turns again; so much wire was on its spool as it was begun.

    `joined`: what was done at the wire before the first turn.
    """
    sd = None if left_m is None else 10.0
    coil = Coil(replace(started("turns", 1500.0), basis=BASIS, spool_left_m=left_m, spool_left_sd_m=sd))
    coil.hear(BoardGreeted(0, FRESH_BOARD), StatusHeard(0, status(0)), *joined)
    coil.hear(GoGiven(0, 5, 10, "operator"))
    coil.hear(StatusHeard(0, status(100, state=BoardState.READY, cause=Cause.ARM, epoch=11)))
    going = status(5000, state=BoardState.TURNING, cause=0, epoch=11, count=400, speed=6667, next=100)
    coil.hear(*[StatusHeard(0, going)] * 3)
    coil.hear(GoGiven(0, 5, 12, "operator"), *[StatusHeard(0, replace(going, ticks=6000))] * 3)
    return [fact.text for fact in coil.facts if isinstance(fact, AlarmRaised)]


def test_a_spool_that_will_not_last_is_told_once() -> None:
    """1500 turns of 130 mm and what they grow by take about 199 m."""
    (text,) = turns_with(150.0)
    assert "the spool is likely to run out before the stop: about 150 m were on it" in text
    assert turns_with(400.0) == turns_with(None) == []
    assert turns_with(150.0, WireChanged(0, 0.0, "s2", "operator")) == []
