"""A dry pass as facts, and what is wanted of the board after each: one leg at a time, and nothing twice."""

from __future__ import annotations

from dataclasses import replace

import pytest

from tests.record.following import FRESH_BOARD, Coil
from tests.record.samples import SETUP, identity, started, status
from windctl.protocol.messages import Capability, Cause, Trip, Trust
from windctl.protocol.messages import State as BoardState
from windctl.protocol.wants import Datum, GuidePlace, Permission
from windctl.record.canonical import decode, encode
from windctl.record.events import (
    BoardGreeted,
    ClearGiven,
    GuideNudged,
    GuideSeen,
    HoldRequested,
    PassAgreed,
    PassWanted,
    StatusHeard,
    Tripped,
)

PLAY, FAR = -SETUP.guide_min, SETUP.guide_max  # 100, 3000
POWERED = Permission(5, 11)


def at(ticks: int, guide: int, **changes: int) -> StatusHeard:
    """The drives powered for the pass, everything at rest."""
    powered = {"state": int(BoardState.READY), "cause": int(Cause.ARM), "epoch": 11, "guide": guide}
    return StatusHeard(0, status(ticks, **{**powered, **changes}))


def agreed() -> Coil:
    coil = Coil(started())
    board = replace(FRESH_BOARD, capabilities=0xFF & ~int(Capability.VIRTUAL))
    coil.hear(PassWanted(0, "operator"), BoardGreeted(0, board), StatusHeard(0, status(0)))
    assert coil.decision.asks == "pass"
    coil.hear(PassAgreed(0, 5, 10, "operator"))
    return coil


def at_far() -> Coil:
    coil = agreed()
    coil.hear(at(100, 0))
    coil.hear(at(2000, FAR))
    assert coil.decision.asks == "look"
    return coil


def wanted(coil: Coil) -> int | str | None:
    """The guide's next place; with "=" before it, what its place is to be called."""
    guide, datum = coil.decision.wants.guide, coil.decision.wants.datum
    assert guide is None or datum is None, "one leg at a time"
    if guide is not None:
        assert guide.given_for == POWERED
        return guide.guide
    if datum is not None:
        assert datum.given_for == POWERED
        assert (datum.count, datum.next, datum.into) == (0, 0, 0)
        return f"={datum.guide}"
    return None


def nudge(coil: Coil, steps: int) -> None:
    end = coil.state.shown.end
    coil.hear(GuideNudged(0, steps, steps / 200, end, "operator"))


def test_outwards_at_the_far_end_the_board_is_told_first_and_moves_then() -> None:
    coil = at_far()
    assert wanted(coil) is None
    nudge(coil, 40)
    assert wanted(coil) == f"={FAR - 40}"
    assert coil.decision.asks is None
    coil.hear(at(2050, FAR))  # a status from before it was told
    assert wanted(coil) == f"={FAR - 40}"
    coil.hear(at(2100, FAR - 40))
    assert coil.state.shown.shift == 40
    assert wanted(coil) == FAR
    coil.hear(at(2150, FAR, inputs=3))  # there, and not at rest yet
    assert wanted(coil) == FAR
    coil.hear(at(2200, FAR))
    assert wanted(coil) is None
    assert coil.decision.asks == "look"


def test_inwards_at_the_far_end_it_moves_first_by_the_play_too_far() -> None:
    coil = at_far()
    nudge(coil, -40)
    for place, called in ((FAR - 40 - PLAY, FAR - 40), (FAR - 40, f"={FAR}")):
        assert wanted(coil) == place
        coil.hear(at(2100 + place % 7, place))
        assert wanted(coil) == called
    assert coil.state.shown.shift == 0, "not before the board says so"
    coil.hear(at(2400, FAR))
    assert coil.state.shown.shift == -40
    assert coil.decision.asks == "look"


def test_equal_legs_of_two_nudges_are_two_wants() -> None:
    """A movement goes out once for each want, so that two that are equal must differ."""
    coil, moves, told = at_far(), set(), set()
    for n in range(3):
        nudge(coil, 40)
        told.add(coil.decision.wants.datum)
        coil.hear(at(3000 + 200 * n, FAR - 40))
        moves.add(coil.decision.wants.guide)
        coil.hear(at(3100 + 200 * n, FAR))
    assert len(moves) == len(told) == 3
    assert {move.guide for move in moves if isinstance(move, GuidePlace)} == {FAR}
    assert {each.guide for each in told if isinstance(each, Datum)} == {FAR - 40}
    assert coil.state.shown.shift == 120


def test_a_nudge_comes_too_late_while_the_guide_moves_and_after_the_pass() -> None:
    coil = at_far()
    nudge(coil, 40)
    before = coil.state.shown
    nudge(coil, 40)
    assert coil.state.shown == before
    coil.hear(HoldRequested(0, "operator", "the hold key"))
    nudge(coil, 40)
    assert coil.decision.wants.hold
    assert coil.state.shown.way == ()


def test_seen_at_both_ends_nothing_between_ends_the_pass_at_the_start() -> None:
    coil = at_far()
    coil.hear(GuideSeen(0, FAR, "far", "operator"))
    assert wanted(coil) == -PLAY
    coil.hear(at(4000, -PLAY))
    assert wanted(coil) == 0
    coil.hear(at(4100, 0))
    nudge(coil, -20)
    for ticks, place in ((4200, 20), (4300, -PLAY), (4400, 0)):
        coil.hear(at(ticks, place))
    coil.hear(GuideSeen(0, 0, "start", "operator", -20))
    assert wanted(coil) == FAR, "the far end is shown again"
    coil.hear(at(6000, FAR))
    assert coil.decision.asks == "look"
    coil.hear(GuideSeen(0, FAR, "far", "operator", -20))
    assert coil.decision.asks is None
    assert wanted(coil) == -PLAY
    coil.hear(at(8000, -PLAY))
    assert coil.state.pass_agreed is not None
    coil.hear(at(8100, 0))
    assert coil.state.pass_agreed is None
    assert not coil.state.pass_wanted
    assert coil.decision.wants.disarmed
    assert (coil.state.shown.shift, coil.state.misplaced) == (-20, False)


# ------------------------------------------------------------ interruptions


@pytest.mark.parametrize(("told", "shift"), [(FAR - 40, 40), (FAR, 0)])
def test_after_a_hold_the_boards_next_epoch_tells_whether_the_datum_was_shifted(
    told: int, shift: int
) -> None:
    coil = at_far()
    nudge(coil, 40)
    coil.hear(HoldRequested(0, "operator", "the hold key"))
    coil.hear(at(2050, FAR))  # of the pass's own epoch: it may still be on its way
    assert coil.state.shown.unsure is not None
    coil.hear(at(2100, told, epoch=12))
    assert coil.state.shown.unsure is None
    assert coil.state.shown.shift == shift
    assert coil.state.misplaced


def test_another_epoch_ends_the_pass_and_no_datum_is_declared_where_the_guide_stands() -> None:
    """A board that fell silent, or was greeted anew: the guide is somewhere, and goes home before a turn."""
    coil = at_far()
    coil.hear(at(2100, FAR, epoch=12))
    assert coil.state.pass_agreed is None
    assert coil.decision.wants.disarmed
    coil.hear(at(2200, FAR, epoch=13, state=BoardState.DRIVES_OFF, cause=Cause.DISARM))
    assert coil.decision.wants.datum is None
    assert coil.decision.asks == "pass"  # nobody called it off


def test_greeted_anew_within_a_pass_the_guide_is_not_taken_to_be_at_its_start() -> None:
    coil = at_far()
    board = identity(epoch=12, state=BoardState.READY, guide=FAR, capabilities=0x7F)
    coil.hear(BoardGreeted(0, board), at(2200, FAR, epoch=13, state=BoardState.DRIVES_OFF))
    assert coil.decision.wants.datum is None
    assert coil.state.misplaced


def test_where_the_guides_place_is_lost_a_person_puts_it_to_its_start_and_sees_it() -> None:
    coil = at_far()
    nudge(coil, 40)
    tripped = {"state": int(BoardState.TRIPPED), "cause": int(Cause.TRIP), "trip": int(Trip.GUIDE_LIMIT)}
    follows = coil.hear(at(2100, FAR, epoch=12, trust=int(Trust.COUNT), **tripped))
    assert [type(event) for event in follows] == [Tripped]
    assert coil.decision.asks == "clear"
    coil.hear(ClearGiven(0, 5, 12, "operator"))
    off = {"state": int(BoardState.DRIVES_OFF), "cause": int(Cause.TRIP)}
    coil.hear(at(2200, FAR, epoch=13, trust=int(Trust.COUNT), **off))
    assert coil.decision.asks == "pass"
    assert coil.state.guide_lost
    datum = coil.decision.wants.datum
    assert datum is not None
    assert (datum.guide, datum.given_for) == (0, Permission(5, 13)), "declared anew, for the start"
    assert coil.state.shown.shift == 0


def test_a_pass_recorded_before_there_was_nudging_reads_as_it_did() -> None:
    old = '{"at_ms":5,"by":"operator","end":"start","guide":0}'
    event = decode("guide_seen", old)
    assert event == GuideSeen(5, 0, "start", "operator", 0, 0.0, 0.0)
    assert (
        decode("guide_nudged", encode(GuideNudged(1, -10, -0.05, "far", "operator"))).kind == "guide_nudged"
    )
