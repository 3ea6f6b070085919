"""Leads and contact are read by themselves before the first turn: asked, refused, taken, never the coil's."""

from __future__ import annotations

import re
from dataclasses import replace

import pytest

from tests.record.following import FRESH_BOARD, Coil
from tests.record.samples import SETUP, reading, started, status
from windctl.forecast.zeroing import CONTACT_SD_OHM
from windctl.protocol.messages import Capability, Cause, ReadingFlag
from windctl.protocol.messages import State as BoardState
from windctl.record.decide import Decision
from windctl.record.events import (
    BoardGreeted,
    ContactZeroed,
    EndRequested,
    Event,
    GoGiven,
    HoldRequested,
    LeadsTogether,
    LinkLost,
    PassAgreed,
    PassWanted,
    ReadingTaken,
    Resumed,
    StatusHeard,
    ZeroEnded,
    ZeroRefused,
    ZeroWanted,
)
from windctl.record.fold import replay
from windctl.record.state import State
from windctl.record.zeroing import ENOUGH, LIMIT_TICKS, NOBODY, SETTLE_TICKS, why_refused
from windctl.run.answers import answer
from windctl.run.requests import Go, Request, Skip, Together, ZeroContact
from windctl.run.said import Answer
from windctl.run.zero_seen import found_words, zero_seen

REAL = replace(FRESH_BOARD, capabilities=0x7F)
SAID_AT = 10_000


def coil(board: object = REAL, mode: str = "live") -> Coil:
    """A real board, set up for the coil, its drives off, nothing consented to."""
    made = Coil(started(readings_mode=mode))
    assert board is not None
    made.hear(BoardGreeted(0, board), StatusHeard(0, status(SAID_AT)))  # type: ignore[arg-type]  # an Identity
    return made


def wanted(mode: str = "live") -> Coil:
    made = coil(mode=mode)
    made.hear(ZeroWanted(0, "operator"))
    return made


def together(mode: str = "live") -> Coil:
    made = wanted(mode)
    made.hear(LeadsTogether(0, "operator"))
    return made


def reads(
    made: Coil, *ohms: float, opened: bool = False, at: int = SAID_AT + SETTLE_TICKS + 200
) -> list[Event]:
    """Readings of the contact from `at` on, four a second, and the board's word after each; what followed."""
    follows: list[Event] = []
    for place, ohm in enumerate(ohms):
        ticks = at + 250 * place
        raw = reading(ticks, 0.0, ohm, resting=True)
        raw = replace(raw, flags=int(ReadingFlag.OPEN)) if opened else raw
        follows += made.hear(ReadingTaken(0, raw), StatusHeard(0, status(ticks)))
    return follows


def say(made: Coil, request: Request, *, leaving: bool = False) -> Answer:
    """A request as the run meets it; its facts are heard."""
    met = answer(request, made.state, made.decision, 0, leaving=leaving)
    made.hear(*met.facts)
    return met


def leads(state: State) -> tuple[float, float]:
    assert state.estimate is not None
    belief = state.estimate.belief
    return belief.mean[3], belief.cov[3][3] ** 0.5


def test_it_asks_for_the_leads_with_the_drives_off_and_for_nothing_else() -> None:
    made = wanted()
    assert made.decision.asks == "leads"
    assert made.decision.wants.sampling is not None
    assert made.decision.wants.armed is None
    assert say(made, Go("operator")) == Answer()  # no go meanwhile
    made.hear(StatusHeard(0, status(SAID_AT + 50, state=BoardState.READY, cause=Cause.ARM)))
    assert made.decision.asks is None
    assert made.decision.wants.disarmed


def test_in_checks_the_contact_is_read_for_it_and_only_for_it() -> None:
    made = coil(mode="checks")
    assert made.decision.wants.sampling is None
    say(made, ZeroContact("operator"))
    assert made.decision.wants.sampling is not None
    say(made, Skip("operator"))
    assert made.decision.wants.sampling is None
    assert made.decision.asks == "go"


def test_the_mean_of_settled_readings_is_taken_off_with_what_it_is_unsure_of() -> None:
    made = together()
    ohms = [0.6, 0.7, 0.8, 0.7, 0.65, 0.75, 0.7, 0.7]
    assert len(ohms) == ENOUGH
    (found,) = reads(made, *ohms)
    assert isinstance(found, ContactZeroed)
    assert found.readings == 8
    assert found.by == "operator"
    assert found.ohm == pytest.approx(0.7, abs=0.005)  # of whole units of the board
    # s^2 = 0.02 + 0.005 over 7; its mean with 7/5 for so few; the floor of 0.2 ohm besides
    assert found.sd_ohm == pytest.approx((0.025 / 7 / 8 * 7 / 5 + 0.2**2) ** 0.5, rel=0.01)
    ohm, sd = leads(made.state)
    assert ohm == found.ohm
    assert sd == pytest.approx((found.sd_ohm**2 + CONTACT_SD_OHM**2) ** 0.5)
    assert made.state.readings_used == 0  # none of it is the coil's
    assert made.decision.asks == "go"
    assert replay(made.facts) == made.state


def test_readings_before_it_was_said_or_while_hands_still_move_do_not_count() -> None:
    made = wanted()
    assert reads(made, *[1.3] * 20, at=SAID_AT - 6_000) == []  # the contact is still on the wire
    made.hear(StatusHeard(0, status(SAID_AT)), LeadsTogether(0, "operator"))
    assert reads(made, 1.3, 1.3, at=SAID_AT + 200) == []
    assert made.state.zero is not None and made.state.zero.ohms == ()
    (found,) = reads(made, *[0.5] * 8)
    assert isinstance(found, ContactZeroed) and found.ohm == pytest.approx(0.5, abs=0.01)


def test_a_moment_apart_begins_it_again() -> None:
    made = together()
    reads(made, *[0.5] * 7)
    reads(made, 0.0, opened=True, at=SAID_AT + 3_000)
    assert made.state.zero is not None and made.state.zero.ohms == ()
    assert reads(made, *[0.5] * 7, at=SAID_AT + 3_500) == []
    assert isinstance(reads(made, 0.5, at=SAID_AT + 6_000)[0], ContactZeroed)


@pytest.mark.parametrize(
    ("ohms", "opened", "why", "told"),
    [
        ([0.0] * ENOUGH, True, "open", "reads open"),
        (
            [203.0] * ENOUGH,
            False,
            "too much",
            r"203.0 ohm were read, and by the profile .* 3.7 ohm at the most",
        ),
        ([4.2, 4.1, 4.3, 4.2, 4.2, 4.1, 4.3, 4.2], False, "too much", "clean the contact"),
        ([0.4, 1.6] * 45, False, "unsteady", "did not settle within 20 s"),
    ],
    ids=["open", "a coil", "a bad contact", "unsteady"],
)
def test_what_cannot_be_leads_is_refused_and_may_be_tried_again(
    ohms: list[float], opened: bool, why: str, told: str
) -> None:
    made = together()
    before = made.state.estimate
    (refused,) = reads(made, *ohms, opened=opened)
    assert isinstance(refused, ZeroRefused)
    assert refused.why == why
    assert pytest.approx(3.7) == refused.most_ohm  # 3 * (0.5 + 2 * 0.3) + 2 * 0.2
    assert re.search(told, why_refused(refused))
    assert made.state.estimate is before
    assert made.decision.asks == "leads"
    seen = zero_seen(made.state)
    assert seen is not None and seen.refused == why_refused(refused) and not seen.together
    last = made.state.status
    assert last is not None
    say(made, Together("operator"))
    (found,) = reads(made, *[0.5] * 8, at=last.ticks + 1_000)
    assert isinstance(found, ContactZeroed)
    assert replay(made.facts) == made.state


def test_without_a_reading_time_runs_out() -> None:
    made = together()
    assert made.hear(StatusHeard(0, status(SAID_AT + LIMIT_TICKS - 50))) == []
    (refused,) = made.hear(StatusHeard(0, status(SAID_AT + LIMIT_TICKS)))
    assert isinstance(refused, ZeroRefused) and refused.why == "silent"
    assert "no steady reading" in why_refused(refused)


def test_a_board_that_stands_at_another_coil_s_count_is_zeroed_as_well() -> None:
    made = together()
    for place in range(8):
        raw = replace(reading(SAID_AT + 1_000 + 250 * place, 812.0, 0.5, resting=True))
        made.hear(ReadingTaken(0, raw))
    assert made.state.zeroed is not None
    assert made.state.readings_used == 0


def test_it_may_be_repeated_and_the_last_one_counts() -> None:
    made = together()
    reads(made, *[0.5] * 8)
    first = leads(made.state)
    say(made, ZeroContact("operator"))
    say(made, Together("operator"))
    reads(made, *[0.9] * 8, at=SAID_AT + 4_000)
    ohm, sd = leads(made.state)
    assert ohm == pytest.approx(0.9, abs=0.01)
    assert sd == pytest.approx(first[1], rel=0.01)  # not surer for having been done twice
    say(made, ZeroContact("operator"))
    say(made, Skip("operator"))
    assert leads(made.state)[0] == ohm  # called off, what was taken off before stays


@pytest.mark.parametrize(
    "end",
    [
        HoldRequested(0, "operator", "the hold key"),
        EndRequested(0, "operator", "not today"),
        ZeroEnded(0, "operator", "passed over"),
        LinkLost(0, "unplugged"),
        Resumed(0, "2026-03-02T11:00:00+01:00", "bench one", "0.1.0"),
        GoGiven(0, 5, 10, "operator"),
    ],
    ids=lambda event: event.kind,
)
def test_it_is_over_and_its_readings_count_no_more(end: Event) -> None:
    made = together()
    reads(made, *[0.5] * 7)
    made.hear(end)
    assert made.state.zero is None
    made.hear(ReadingTaken(0, reading(SAID_AT + 4_000, 0.0, 0.5, resting=True)))
    assert made.state.zeroed is None
    assert leads(made.state) == (0.5, 0.3)
    assert not made.decision.asks or made.decision.asks in ("go", "turn")


def test_a_board_that_is_greeted_again_wants_to_hear_it_again() -> None:
    made = together()
    reads(made, *[0.5] * 5)
    made.hear(BoardGreeted(0, replace(REAL, boot=6)), StatusHeard(0, status(50, boot=6)))
    assert made.decision.asks == "leads"
    assert made.state.zero is not None and made.state.zero.ohms == ()


def test_until_the_contact_is_on_the_wire_again_a_go_says_so() -> None:
    made = together()
    reads(made, *[0.5] * 8)
    assert made.state.contact_off
    made.hear(GoGiven(0, 5, 10, "operator"))
    assert not made.state.contact_off


def test_the_dry_pass_comes_after_it() -> None:
    made = coil()
    made.hear(PassWanted(0, "operator"))
    assert made.decision.asks == "pass"
    say(made, ZeroContact("operator"))
    assert made.decision.asks == "leads"
    say(made, Together("operator"))
    reads(made, *[0.5] * 8)
    assert made.decision.asks == "pass"
    made.hear(PassAgreed(0, 5, 10, "operator"))
    assert "the guide is being shown" in say(made, ZeroContact("operator")).says
    seen = zero_seen(made.state)
    assert seen is not None and not seen.can


def test_what_is_asked_where_it_cannot_be_met_is_answered_in_words() -> None:
    made = coil()
    assert "nobody waits" in say(made, Together("operator")).says
    say(made, ZeroContact("operator"))
    assert "already" in say(made, ZeroContact("operator")).says
    assert say(made, Together("operator"), leaving=True).facts == ()
    without = Coil(replace(started(), setup=replace(SETUP, fitted=int(Capability.DRIVE_STEP))))
    without.hear(BoardGreeted(0, REAL), StatusHeard(0, status(0)))
    assert "where the board has one" in say(without, ZeroContact("operator")).says
    late = coil()
    late.hear(GoGiven(0, 5, 10, "operator"))
    assert "before the first turn" in say(late, ZeroContact("operator")).says


@pytest.mark.parametrize("there", [False, True])
def test_a_simulated_machine_needs_a_simulated_hand(there: bool) -> None:
    made = coil(replace(FRESH_BOARD, capabilities=0xFF))
    met = say(made, ZeroContact("operator", simulated_hand=there))
    assert (met.says == NOBODY) is not there
    assert (made.state.zero is not None) is there


def test_asked_for_before_it_is_known_to_be_simulated_it_is_called_off_in_words() -> None:
    made = Coil(started())
    made.hear(ZeroWanted(0, "operator"))
    (over,) = made.hear(BoardGreeted(0, replace(FRESH_BOARD, capabilities=0xFF)), StatusHeard(0, status(0)))[
        :1
    ]
    assert over == ZeroEnded(0, "windctl", NOBODY)
    assert isinstance(made.decision, Decision) and made.decision.asks == "go"


def test_the_result_is_told_beside_the_profile_s_figure() -> None:
    made = together()
    reads(made, *[0.7] * 8)
    seen = zero_seen(made.state)
    assert seen is not None
    words = found_words(seen)  # in sixteenths of the board's 0.305 ohm
    assert "0.71 ± 0.39 ohm, taken off from now on; the profile says 0.50 ± 0.59 ohm" in words
    assert "surer" not in words
    surer = replace(seen, profile_u95=0.1)
    assert found_words(surer).endswith("0.50 ± 0.10 ohm, which is the surer")
