"""What follows from a winder's accidents: hands only with the drives off, and every turn where it belongs."""

from __future__ import annotations

from dataclasses import replace

import pytest

from tests.record.following import Coil, at_rest, turning
from tests.record.samples import CPT, identity, reading
from windctl.forecast.finish import finish_at
from windctl.protocol.messages import Cause, GuideTo, InputBit, Refusal, Refused, Trip, Trust
from windctl.protocol.messages import State as BoardState
from windctl.protocol.wants import Datum, GuidePlace, Permission
from windctl.record.events import (
    BoardGreeted,
    ClearGiven,
    CommandRefused,
    CountCorrected,
    EndRequested,
    Event,
    GoGiven,
    HandsAsked,
    Held,
    ReadingTaken,
    Resumed,
    Spliced,
    StatusHeard,
    Tripped,
    Unwound,
    WentOn,
    WireBroke,
    WireChanged,
)
from windctl.record.fold import Fit

STANDS = int(InputBit.STOP_OK | InputBit.GUARD_OK | InputBit.STANDING)


def hears(coil: Coil, state: BoardState, turns: float, epoch: int, **more: int) -> list[Event]:
    """The next status of the board."""
    now = coil.state.status
    assert now is not None
    changes = {"cause": Cause.HOLD, "speed": 0, "inputs": STANDS, "next": 200, **more}
    told = replace(now, ticks=now.ticks + 50, state=state, count=round(turns * CPT), epoch=epoch, **changes)
    return coil.hear(StatusHeard(0, told))


def tripped(trip: Trip, at: float = 101.0, stands: float = 110.0, trust: int = 3) -> Coil:
    """A coil that tripped at one turn and came to rest at another."""
    coil = turning()
    hears(coil, BoardState.TRIPPED, at, 12, trip=trip, cause=Cause.TRIP, inputs=3, speed=5000, trust=trust)
    hears(coil, BoardState.TRIPPED, stands, 12, trip=trip, cause=Cause.TRIP, trust=trust)
    return coil


def drives_off(turns: float = 130.0) -> Coil:
    """A coil held, with the drives switched off for somebody's hands."""
    coil = turning()
    at_rest(coil, turns, Cause.HOLD)
    coil.hear(HandsAsked(0, "operator", "to look"))
    hears(coil, BoardState.DRIVES_OFF, turns, 13, cause=Cause.DISARM)
    return coil


def powered_again(coil: Coil, turns: float) -> list[Event]:
    """Consent, and the board has powered its drives for it: what follows."""
    now = coil.state.status
    assert now is not None
    coil.hear(GoGiven(0, now.boot, now.epoch, "operator"))
    return hears(coil, BoardState.READY, turns, now.epoch + 1, cause=Cause.ARM)


# ---------------------------------------------------------------- trips wait for a person


def test_a_trip_is_recorded_once_and_a_person_is_asked_when_it_stands() -> None:
    coil = turning()
    moving = hears(coil, BoardState.TRIPPED, 101.0, 12, trip=Trip.SLIP, cause=Cause.TRIP, inputs=3, speed=99)
    assert moving == [Tripped(0, 101 * CPT, Trip.SLIP)]
    assert coil.decision.asks is None
    rests = hears(coil, BoardState.TRIPPED, 105.0, 12, trip=Trip.SLIP, cause=Cause.TRIP)
    assert [type(fact) for fact in rests] == [Held]
    assert coil.state.finished is None
    assert coil.decision.asks == "clear"
    assert coil.decision.wants.clear_trip is None and coil.decision.wants.go is None


def test_clearing_starts_nothing_and_asks_for_a_go() -> None:
    coil = tripped(Trip.GUARD)
    coil.hear(ClearGiven(0, 5, 12, "operator"))
    assert coil.decision.wants.clear_trip == Permission(5, 12)
    assert coil.decision.asks is None
    hears(coil, BoardState.DRIVES_OFF, 110.0, 13, trip=0, cause=Cause.TRIP)
    assert coil.decision.asks == "go"
    assert coil.decision.wants.armed is None and coil.decision.wants.go is None
    assert coil.state.tripped is None


def test_ended_while_tripped_is_tripped_and_ended_after_clearing_is_stopped() -> None:
    coil = tripped(Trip.TENSION_LOW)
    coil.hear(EndRequested(0, "operator", "enough"))
    assert coil.state.finished is not None
    assert (coil.state.finished.outcome, coil.state.finished.verdict) == ("tripped", "not judged")
    assert "tension low" in coil.state.finished.reason
    coil = tripped(Trip.TENSION_LOW)
    coil.hear(ClearGiven(0, 5, 12, "operator"))
    hears(coil, BoardState.DRIVES_OFF, 110.0, 13, trip=0, cause=Cause.TRIP)
    coil.hear(EndRequested(0, "operator", "enough"))
    assert coil.state.finished is not None
    assert (coil.state.finished.outcome, coil.state.finished.reason) == ("stopped", "enough")


def test_a_hold_on_top_of_a_trip_does_not_stop_it_from_being_cleared() -> None:
    from windctl.record.events import HoldRequested

    coil = tripped(Trip.GUARD)
    coil.hear(HoldRequested(0, "windctl", "the record is 3 s behind"), ClearGiven(0, 5, 12, "operator"))
    assert coil.decision.wants.hold and coil.decision.wants.clear_trip == Permission(5, 12)


@pytest.mark.parametrize("trust", [int(Trust.GUIDE), int(Trust.COUNT), 0])
def test_what_the_board_has_lost_only_a_person_can_give(trust: int) -> None:
    coil = tripped(Trip.INDEX, trust=trust)
    coil.hear(ClearGiven(0, 5, 12, "operator"))
    hears(coil, BoardState.DRIVES_OFF, 110.0, 13, trip=0, cause=Cause.TRIP, trust=trust)
    assert coil.decision.asks == "place"
    coil.hear(HandsAsked(0, "operator", "count"), CountCorrected(0, 108.0, "operator", "counted", True))
    assert coil.decision.asks == "go"
    assert coil.state.turns == 108.0
    declared = Datum(108 * CPT, 108 * 40, 108, 0, Permission(5, 13))
    if trust & Trust.GUIDE:  # it still knows where the guide is: the guide is driven there once powered
        assert coil.decision.wants.datum is None
    else:
        assert coil.decision.wants.datum == declared


# ---------------------------------------------------------------- hands


def test_hands_go_in_only_after_the_drives_are_off_and_out_before_they_are_on_again() -> None:
    coil = turning()
    at_rest(coil, 130.0, Cause.HOLD)
    assert coil.decision.asks == "go" and not coil.state.drives_off
    coil.hear(HandsAsked(0, "operator", "to look"))
    assert coil.decision.wants.disarmed
    assert coil.decision.asks is None  # a go typed now would come before the drives are off
    hears(coil, BoardState.DRIVES_OFF, 130.0, 13, cause=Cause.DISARM)
    assert coil.state.drives_off and not coil.decision.wants.disarmed
    assert coil.decision.asks == "go"
    assert coil.decision.wants.armed is None
    coil.hear(GoGiven(0, 5, 13, "operator"))
    assert coil.decision.wants.armed == Permission(5, 13)
    follows = hears(coil, BoardState.READY, 130.0, 14, cause=Cause.ARM)
    assert follows == [GoGiven(0, 5, 14, "consent")]
    assert coil.decision.wants.go == Permission(5, 14)
    assert coil.decision.wants.guide is None and coil.decision.wants.datum is None  # nothing was moved


def test_a_consent_given_before_is_void_once_hands_go_in() -> None:
    coil = turning()
    at_rest(coil, 130.0, Cause.HOLD)
    coil.hear(GoGiven(0, 5, 12, "operator"))
    assert coil.decision.wants.go is not None
    coil.hear(HandsAsked(0, "operator", "to look"))
    assert coil.decision.wants.go is None


def test_readings_while_somebody_is_at_the_wire_teach_nothing() -> None:
    coil = drives_off()
    before = coil.state.estimate
    for ticks in range(70_000, 73_000, 250):
        coil.hear(ReadingTaken(0, reading(ticks, 130.0, 41.0, resting=True)))
    assert coil.state.estimate == before


# ---------------------------------------------------------------- the wire


def test_a_trip_for_low_tension_tells_where_the_wire_ends() -> None:
    coil = tripped(Trip.TENSION_LOW, at=101.0, stands=110.0)
    assert coil.state.turns == 110.0
    assert coil.state.wire_ends_at == 100.0  # of the turn that was short of tension, a turn before
    other = tripped(Trip.GUARD, at=101.0, stands=110.0)
    assert other.state.wire_ends_at == 110.0


def test_after_a_splice_the_coil_goes_on_from_where_the_wire_ended() -> None:
    coil = tripped(Trip.TENSION_LOW)
    coil.hear(
        HandsAsked(0, "operator", "join"),
        WireBroke(0, 100.0, "operator"),
        CountCorrected(0, 100.0, "operator", "without wire"),
        Spliced(0, 100.0, "operator"),
        ClearGiven(0, 5, 12, "operator"),
    )
    hears(coil, BoardState.DRIVES_OFF, 110.0, 13, trip=0, cause=Cause.TRIP)
    assert coil.state.turns == 100.0 and coil.state.splices == 1
    assert coil.decision.wants.guide is None and coil.decision.wants.datum is None  # not without consent
    powered_again(coil, 110.0)
    consent = Permission(5, 14)
    # a turn of 400 counts takes 40 guide steps
    assert coil.decision.wants.guide == GuidePlace(4000, 200, consent)
    assert coil.decision.wants.datum == Datum(100 * CPT, 4000, 100, 0, consent)
    assert coil.decision.wants.go == consent
    went = hears(coil, BoardState.TURNING, 100.0, 14, cause=0, inputs=3, speed=400, next=120)
    assert went == [WentOn(0, 100 * CPT)]
    assert coil.state.fit is Fit.SAME
    assert coil.decision.wants.guide is None and coil.decision.wants.datum is None


def test_a_splice_and_another_spool_widen_what_they_must() -> None:
    coil = turning(1000.0)
    for i in range(1, 40):
        turn = 1000.0 + i
        coil.hear(ReadingTaken(0, reading(6_000 + 250 * i, turn, 0.66 * turn + 0.01 * turn)))
    at_rest(coil, 1040.0, Cause.HOLD)
    before = coil.state.estimate
    assert before is not None
    sds = [finish_at(before, 1500.0).sd]
    for joined in (Spliced(0, 1040.0, "operator"), WireChanged(0, 1040.0, "spool 8", "operator")):
        other = Coil(coil.facts[0])
        other.hear(*coil.facts[1:], HandsAsked(0, "operator", "join"), joined)
        assert other.state.estimate is not None
        sds.append(finish_at(other.state.estimate, 1500.0).sd)
    assert sds[0] < sds[1] < sds[2]


# ---------------------------------------------------------------- the count


def test_turns_taken_off_by_hand_are_counted_by_the_board_and_become_a_fact_with_the_next_consent() -> None:
    coil = drives_off(130.0)
    for turns in (129.0, 126.0, 120.5):
        assert hears(coil, BoardState.DRIVES_OFF, turns, 13, cause=Cause.DISARM) == []
    assert coil.state.turns == 120.5
    follows = coil.hear(GoGiven(0, 5, 13, "operator"))
    assert follows == [Unwound(0, 130 * CPT, 48_200)]
    follows = hears(coil, BoardState.READY, 120.5, 14, cause=Cause.ARM)
    assert follows == [GoGiven(0, 5, 14, "consent")]
    consent = Permission(5, 14)
    assert coil.decision.wants.guide == GuidePlace(4820, 200, consent)
    assert coil.decision.wants.datum == Datum(48_200, 4820, 120, 200, consent)


def test_a_jolt_of_the_bobbin_is_no_unwinding() -> None:
    coil = drives_off(130.0)
    hears(coil, BoardState.DRIVES_OFF, 129.6, 13, cause=Cause.DISARM)
    assert coil.hear(GoGiven(0, 5, 13, "operator")) == []


def test_turning_by_hand_goes_on_counting_after_the_turn_was_put_right() -> None:
    coil = drives_off(130.0)
    coil.hear(CountCorrected(0, 125.0, "operator", "counted", True))
    assert coil.state.turns == 125.0
    hears(coil, BoardState.DRIVES_OFF, 127.0, 13, cause=Cause.DISARM)  # three back, by its own count
    assert coil.state.turns == 122.0
    powered_again(coil, 127.0)
    assert coil.decision.wants.datum == Datum(122 * CPT, 4880, 122, 0, Permission(5, 14))


def test_a_miscount_leaves_the_resistance_and_moves_the_turn() -> None:
    coil = turning(1000.0)
    for i in range(1, 40):
        turn = 1000.0 + i
        coil.hear(ReadingTaken(0, reading(6_000 + 250 * i, turn, 0.67 * turn)))
    at_rest(coil, 1040.0, Cause.HOLD)
    before = coil.state.estimate
    assert before is not None
    coil.hear(HandsAsked(0, "operator", "count"))
    hears(coil, BoardState.DRIVES_OFF, 1040.0, 13, cause=Cause.DISARM)
    coil.hear(CountCorrected(0, 1030.0, "operator", "counted", True))
    after = coil.state.estimate
    assert after is not None
    assert finish_at(after, 1030.0).ohm == pytest.approx(finish_at(before, 1040.0).ohm, rel=1e-6)


def test_a_correction_that_the_board_was_never_told_makes_the_turn_a_question_again() -> None:
    coil = drives_off(130.0)
    coil.hear(CountCorrected(0, 125.0, "operator", "counted", True))
    coil.hear(Resumed(0, "later", "somebody", "0.1.0"))
    coil.hear(BoardGreeted(0, identity(epoch=14, state=BoardState.DRIVES_OFF, count=130 * CPT, next=200)))
    assert coil.state.fit is Fit.LOST and coil.decision.asks == "turn"
    told = drives_off(130.0)
    told.hear(CountCorrected(0, 125.0, "operator", "counted", True))
    told.hear(Resumed(0, "later", "somebody", "0.1.0"))
    told.hear(BoardGreeted(0, identity(epoch=14, state=BoardState.READY, count=125 * CPT, next=125)))
    assert told.state.fit is Fit.SAME


def test_a_turn_at_the_stop_ends_the_coil_only_when_somebody_agrees() -> None:
    coil = turning(kind="turns", value=300.0, mode="none")
    at_rest(coil, 130.0, Cause.HOLD)
    coil.hear(HandsAsked(0, "operator", "count"))
    hears(coil, BoardState.DRIVES_OFF, 130.0, 13, cause=Cause.DISARM)
    coil.hear(CountCorrected(0, 300.0, "operator", "counted", True))
    assert coil.state.finished is None and coil.decision.asks == "go"
    coil.hear(GoGiven(0, 5, 13, "operator"))
    assert coil.state.finished is not None and coil.state.finished.outcome == "finished"
    assert coil.decision.wants.hold and coil.decision.wants.armed is None


def test_a_guide_that_the_board_will_not_move_spends_the_consent() -> None:
    coil = drives_off(130.0)
    hears(coil, BoardState.DRIVES_OFF, 120.0, 13, cause=Cause.DISARM)
    powered_again(coil, 120.0)
    assert coil.decision.wants.guide is not None
    coil.hear(CommandRefused(0, Refused(GuideTo.CODE, Refusal.RANGE, 14, 0)))
    assert coil.decision.wants.guide is None and coil.decision.wants.go is None
    assert coil.decision.asks == "go" and coil.decision.blocked == "the board refused: range"


def test_where_a_hand_guides_nothing_is_moved() -> None:
    from windctl.protocol.messages import Capability

    coil = drives_off(130.0)
    started = coil.state.started
    assert started is not None
    setup = replace(started.setup, fitted=int(Capability.DRIVE_STEP | Capability.CONTACT))
    by_hand = Coil(replace(started, setup=setup))
    by_hand.hear(*coil.facts[1:])
    hears(by_hand, BoardState.DRIVES_OFF, 120.0, 13, cause=Cause.DISARM)
    powered_again(by_hand, 120.0)
    assert by_hand.decision.wants.guide is None and by_hand.decision.wants.datum is None
    assert by_hand.decision.wants.go == Permission(5, 14)
