"""A coil that is stopped to be read: asked, drives off, by the contact or by hand, then the missing turns."""

from __future__ import annotations

from dataclasses import replace

from tests.record.following import Coil, at_rest, measured, turning
from tests.record.samples import CPT, identity, reading, status
from windctl.forecast.finish import finish_at
from windctl.protocol.messages import Capability, Cause, ReadingFlag
from windctl.protocol.messages import State as BoardState
from windctl.record.checking import ENOUGH
from windctl.record.consent import PATIENCE_TICKS
from windctl.record.events import (
    AlarmRaised,
    BoardGreeted,
    CheckAsked,
    CheckTaken,
    CoilFinished,
    CountCorrected,
    Event,
    GoGiven,
    HandsAsked,
    ReadingTaken,
    ReadingTyped,
    Resumed,
    StatusHeard,
    StopPointChosen,
)
from windctl.record.fold import replay
from windctl.record.taking_back import TAKE_BACK_TICKS


def stopped(kind: str = "dcr_20c_ohm", value: float = 1000.0) -> tuple[Coil, list[Event], float]:
    """A coil in checks mode that has come to its first stop: what followed, and the turn."""
    coil = turning(kind=kind, value=value, mode="checks")
    assert coil.state.stop_point is not None
    stop = coil.state.stop_point / CPT
    return coil, at_rest(coil, stop, Cause.STOP_POINT), stop


def off(coil: Coil, turn: float, ticks: int = 62_000) -> list[Event]:
    """The drives are off."""
    count = round(turn * CPT)
    at = status(ticks, state=BoardState.DRIVES_OFF, cause=Cause.DISARM, epoch=13, count=count, next=100)
    return coil.hear(StatusHeard(0, at))


def real(coil: Coil) -> None:
    """The board is no simulated one."""
    assert coil.state.identity is not None
    coil.state = replace(coil.state, identity=replace(coil.state.identity, capabilities=0x7F))


def typed(turn: float) -> ReadingTyped:
    return ReadingTyped(0, turn, measured(turn), 20.0, "operator")


def test_at_the_stop_a_reading_is_asked_for_and_the_drives_go_off() -> None:
    coil, follows, stop = stopped()
    _, asked, hands = follows  # after that it stands
    assert isinstance(asked, CheckAsked)
    assert asked.turn == stop
    assert asked.with_ohm < 0.5 * asked.without_ohm
    assert isinstance(hands, HandsAsked)
    wants = coil.decision.wants
    assert wants.disarmed
    assert wants.sampling is not None
    assert wants.go is None
    assert coil.decision.asks is None  # not before nothing is powered any more
    real(coil)
    off(coil, stop)
    assert coil.decision.asks == "reading"


def test_the_contact_s_settled_readings_end_the_check_and_the_missing_turns_follow() -> None:
    coil, _, stop = stopped()
    off(coil, stop)
    opened = replace(reading(61_900, stop, 0.0, resting=True), flags=int(ReadingFlag.OPEN))
    assert coil.hear(*[ReadingTaken(0, opened)] * 20) == []  # nobody touches the wire yet: no alarm
    follows: list[Event] = []
    for i in range(ENOUGH):
        follows += coil.hear(ReadingTaken(0, reading(63_000 + 250 * i, stop, measured(stop), resting=True)))
    taken, more = follows
    assert taken == CheckTaken(0, stop, True, "contact")
    assert isinstance(more, StopPointChosen)
    assert more.count > coil.state.count
    assert not any(isinstance(fact, AlarmRaised) for fact in coil.facts)
    assert coil.decision.asks == "go"
    assert coil.decision.wants.sampling is None


def finished(coil: Coil, stop: float) -> CoilFinished:
    """After the check, wound to the stop point it gave."""
    coil.hear(GoGiven(0, 5, 13, "operator"))
    powered = status(
        70_000, state=BoardState.READY, cause=Cause.ARM, epoch=14, count=round(stop * CPT), next=100
    )
    coil.hear(StatusHeard(0, powered))
    coil.hear(StatusHeard(0, replace(powered, ticks=71_000, state=BoardState.TURNING, cause=0)))
    assert coil.state.stop_point is not None
    follows = at_rest(coil, coil.state.stop_point / CPT, Cause.STOP_POINT, epoch=15)
    (end,) = [fact for fact in follows if isinstance(fact, CoilFinished)]
    return end


def test_a_typed_reading_does_as_well_and_the_coil_ends_at_its_target() -> None:
    coil, _, stop = stopped()
    real(coil)
    off(coil, stop)
    taken, more = coil.hear(typed(stop))
    assert taken == CheckTaken(0, stop, True, "operator")
    assert isinstance(more, StopPointChosen)
    end = finished(coil, stop)
    assert end.outcome == "finished"
    assert end.reason == "the target is met"
    assert end.verdict == "within"
    assert abs(end.dcr_20c_ohm - 1000.0) < 2.0
    assert coil.state.checks == 1  # one wound: the second stop was sure enough


def test_a_reading_that_does_not_fit_is_not_believed_alone() -> None:
    coil, _, stop = stopped()
    real(coil)
    off(coil, stop)
    wrong = replace(typed(stop), ohm=1.4 * measured(stop))
    assert coil.hear(wrong) == []
    assert coil.decision.asks == "reading"
    taken, _ = coil.hear(typed(stop))
    assert isinstance(taken, CheckTaken)


def test_a_check_can_be_passed_over() -> None:
    coil, _, stop = stopped()
    real(coil)
    off(coil, stop)
    (end,) = coil.hear(CheckTaken(0, stop, False, "operator"))
    assert isinstance(end, CoilFinished)
    assert end.verdict == "not judged"
    assert "no settled reading" in end.reason


def test_a_coil_for_turns_is_read_at_its_end_and_not_before() -> None:
    coil, follows, stop = stopped("turns", 1500.0)
    assert stop == 1500.0
    assert isinstance(follows[1], CheckAsked)
    off(coil, stop)
    (taken,) = coil.hear(typed(stop))
    assert isinstance(taken, CheckTaken)
    (end,) = off(coil, stop, ticks=62_000 + TAKE_BACK_TICKS)  # second thoughts are over
    assert isinstance(end, CoilFinished)
    assert (end.verdict, end.turns) == ("within", 1500.0)
    assert abs(end.dcr_20c_ohm - 1.02 * (0.65 * 1500 + 1e-5 * 1500**2)) < 3.0


def test_a_simulated_contact_is_waited_for_before_anybody_is_asked() -> None:
    coil, _, stop = stopped()
    off(coil, stop)
    assert coil.decision.asks is None
    off(coil, stop, ticks=60_000 + PATIENCE_TICKS)
    assert coil.decision.asks == "reading"


def test_a_reading_at_a_splice_moves_the_stop_and_counts_as_a_check() -> None:
    coil = turning(mode="checks")
    at_rest(coil, 800.0, Cause.HOLD)
    coil.hear(HandsAsked(0, "operator", "join the wire"))
    off(coil, 800.0)
    before = finish_at(coil.state.estimate, 1400.0).sd  # type: ignore[arg-type]  # it has begun
    (moved,) = coil.hear(typed(800.0))
    assert isinstance(moved, StopPointChosen)
    assert finish_at(coil.state.estimate, 1400.0).sd < 0.5 * before  # type: ignore[arg-type]  # it has begun
    assert coil.state.checks == 1


def test_the_other_modes_are_not_stopped_to_be_read() -> None:
    for mode in ("live", "none"):
        coil = turning(kind="turns", value=1500.0, mode=mode)
        follows = at_rest(coil, 1500.0, Cause.STOP_POINT)
        assert not any(isinstance(fact, CheckAsked) for fact in follows)


def test_a_check_survives_an_interruption() -> None:
    """Whatever runs the coil next finds it waiting for its reading."""
    coil, _, stop = stopped()
    off(coil, stop)
    again = replay(coil.facts)
    assert again.check == coil.state.check is not None
    assert again == coil.state
    assert identity().capabilities & 128  # the samples' board is a simulated one


def test_after_a_restart_of_the_board_the_check_goes_on_where_somebody_says_that_it_stands() -> None:
    """The board counts from what it is told; its contact and a typed reading are as good as before."""
    for by_hand in (False, True):
        coil, _, stop = stopped()
        off(coil, stop)
        coil.hear(Resumed(0, "2026-03-02T11:00:00+01:00", "bench one", "0.1.0"))
        coil.hear(BoardGreeted(0, identity(boot=6, state=BoardState.DRIVES_OFF, coil_token=0, next=0)))
        assert coil.decision.asks == "turn"
        coil.hear(CountCorrected(0, stop, "operator", "given when resuming"))
        at = status(900, boot=6, epoch=1, count=round(stop * CPT))
        coil.hear(StatusHeard(0, at))
        assert coil.decision.asks is None  # the simulated contact is on its way
        follows = coil.hear(typed(stop)) if by_hand else []
        for i in range(0 if by_hand else ENOUGH):
            taken = reading(1_500 + 250 * i, stop, measured(stop), resting=True)
            follows += coil.hear(ReadingTaken(0, taken))
        assert [type(fact) for fact in follows] == [CheckTaken]
        assert coil.decision.asks == "go"
        (more,) = [f for f in coil.hear(GoGiven(0, 6, 1, "operator")) if isinstance(f, StopPointChosen)]
        assert more.count > round(stop * CPT)


def test_without_a_contact_a_person_is_asked_at_once_and_nothing_is_measured() -> None:
    """The board may have a contact; what counts is what the profile says is fitted."""
    coil = turning(mode="checks")
    assert coil.state.started is not None and coil.state.stop_point is not None
    started = coil.state.started
    bare = replace(started.setup, fitted=started.setup.fitted & ~int(Capability.CONTACT))
    coil.state = replace(coil.state, started=replace(started, setup=bare))
    stop = coil.state.stop_point / CPT
    at_rest(coil, stop, Cause.STOP_POINT)
    off(coil, stop)
    assert coil.state.check is not None
    assert coil.decision.asks == "reading"
    assert coil.decision.wants.sampling is None
