"""A winder's accidents on the virtual machine, in simulated time: what is said, and the coil comes right."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from tests.run.operator import Step, answering, asked
from tests.run.winding import SHIPPED, Wound, order, wind, with_key, with_stop
from windctl.book.open import open_book
from windctl.machine.plant.faults import Faults
from windctl.machine.virtual.bench import Bench
from windctl.profile.builtin import VIRTUAL
from windctl.profile.model import MachineProfile
from windctl.protocol.messages import Cause
from windctl.protocol.messages import State as BoardState
from windctl.record.events import (
    CountCorrected,
    Event,
    GoGiven,
    HandsAsked,
    Held,
    Spliced,
    Tripped,
    Unwound,
    WentOn,
    WireBroke,
    WireChanged,
)
from windctl.run.requests import (
    Broke,
    Clear,
    CountIs,
    DrivesOff,
    End,
    Go,
    Hold,
    NewWire,
    Note,
    Request,
    Splice,
    Unwind,
)
from windctl.run.snapshot import Snapshot

TURNS = 150
RECIPE = with_stop(SHIPPED, turns=TURNS, tolerance_pct=0.5)
for _key, _value in {
    "start_turns": 3,
    "finish_turns": 3,
    "cruise_rpm": 700,
    "ramp_rpm_per_s": 300,
}.items():
    RECIPE = with_key(RECIPE, _key, _value)

ME = "operator"
GO = Step(asked("go"), Go(ME))
CLEAR = Step(asked("clear"), Clear(ME))


def past(turn: float) -> Callable[[Snapshot, Bench], bool]:
    """Turning, beyond a turn."""
    return lambda seen, _bench: seen.phase == "turning" and seen.turns >= turn


def hold_at(turn: float) -> Step:
    """Somebody holds once that turn is passed."""
    return Step(past(turn), Hold(ME, "looked odd"))


def hands(what: Request | Callable[[Bench], None]) -> Step:
    """With the drives off for somebody's hands, something is said or done."""
    return Step(asked("go", lambda seen: seen.drives_off and seen.hands is not None), what)


def wound(
    folder: Path, *steps: Step, faults: Faults | None = None, profile: MachineProfile = VIRTUAL
) -> Wound:
    """A coil with somebody standing by."""
    return wind(RECIPE, folder / "coils.book", faults=faults, profile=profile, during=answering(*steps))


def facts(folder: Path, *kinds: type[Event]) -> list[Event]:
    """What the record says of these kinds; it verifies."""
    with open_book(folder / "coils.book") as book:
        (head,) = book.list()
        assert book.verify().broken == ()
        return [event for event in book.events(head.number) if isinstance(event, kinds)]


def came_right(coil: Wound, least: float = TURNS - 1.1, most: float = TURNS + 1.1) -> None:
    """Finished at its count, as many true turns, the guide where the program ends, the estimate true."""
    summary = coil.outcome.summary
    assert (summary.outcome, summary.turns) == ("finished", TURNS), summary
    assert least <= coil.truth.true_turns <= most
    board = coil.bench.board
    program = order(RECIPE)[1].plan.program
    assert board.guide == program.place_of(TURNS * program.counts_per_turn).guide
    assert summary.dcr_20c_ohm is not None and summary.dcr_u95_ohm is not None
    assert abs(summary.dcr_20c_ohm - coil.truth.true_dcr_20c_ohm) <= 2.0 * summary.dcr_u95_ohm


# ---------------------------------------------------------------- the wire


def test_a_broken_wire_is_spliced_where_the_trip_says_that_it_broke(tmp_path: Path) -> None:
    coil = wound(
        tmp_path,
        Step(asked("clear"), Splice(ME)),
        Step(asked("clear", lambda seen: seen.splices == 1), Clear(ME)),
        GO,
        faults=Faults(wire_breaks_at_turn=60),
    )
    came_right(coil)
    broke, corrected, spliced = facts(tmp_path, WireBroke, CountCorrected, Spliced)
    assert isinstance(broke, WireBroke) and 59.0 <= broke.turn <= 61.0  # it broke after 60 turns
    assert isinstance(corrected, CountCorrected) and corrected.turn == broke.turn and not corrected.miscounted
    assert isinstance(spliced, Spliced) and spliced.turn == broke.turn
    went = [event.count / 400 for event in facts(tmp_path, WentOn) if isinstance(event, WentOn)]
    assert went[-1] == pytest.approx(broke.turn, abs=0.01)
    held = [event.count / 400 for event in facts(tmp_path, Held) if isinstance(event, Held)]
    assert held[0] - broke.turn > 5.0  # so many turns were counted without wire while it braked


def test_turns_without_wire_can_be_turned_back_by_hand_instead(tmp_path: Path) -> None:
    def back_to_the_break(bench: Bench) -> None:
        bench.plant.turn_by_hand(60.0 - bench.board.count / 400)

    coil = wound(
        tmp_path,
        Step(asked("clear"), back_to_the_break),
        Step(asked("clear", lambda seen: seen.turns <= 60.01), Splice(ME)),
        Step(asked("clear", lambda seen: seen.splices == 1), Clear(ME)),
        GO,
        faults=Faults(wire_breaks_at_turn=60),
    )
    came_right(coil)
    (spliced,) = facts(tmp_path, Spliced)
    assert isinstance(spliced, Spliced) and spliced.turn == pytest.approx(60.0, abs=0.01)
    (unwound,) = facts(tmp_path, Unwound)
    assert isinstance(unwound, Unwound) and unwound.count == pytest.approx(60 * 400, abs=2)


def test_without_a_tension_sensor_the_readings_tell_of_a_break_and_hold(tmp_path: Path) -> None:
    blind = VIRTUAL.model_copy(update={"tension": VIRTUAL.tension.model_copy(update={"sensor": False})})
    coil = wound(
        tmp_path,
        Step(asked("go", lambda seen: "open circuit" in seen.alarm), DrivesOff(ME, "to look")),
        hands(Splice(ME)),
        Step(asked("go", lambda seen: seen.splices == 1), Go(ME)),
        faults=Faults(wire_breaks_at_turn=60),
        profile=blind,
    )
    (spliced,) = facts(tmp_path, Spliced)
    assert isinstance(spliced, Spliced)
    assert 55.0 <= spliced.turn <= 61.0  # a reading takes a revolution and comes four times a second
    came_right(coil, TURNS - 1.0, TURNS + 6.0)


def test_another_spool_is_joined_on(tmp_path: Path) -> None:
    coil = wound(
        tmp_path,
        hold_at(40.0),
        Step(asked("go"), NewWire(ME, "spool 8")),  # the drives are on: they go off first
        hands(NewWire(ME, "spool 8")),
        Step(asked("go", lambda seen: seen.splices == 1), Go(ME)),
    )
    came_right(coil, TURNS, TURNS)
    (changed,) = facts(tmp_path, WireChanged)
    assert isinstance(changed, WireChanged) and changed.spool == "spool 8" and changed.turn > 40.0
    assert facts(tmp_path, CountCorrected) == []


def test_a_break_without_a_splice_can_be_the_end(tmp_path: Path) -> None:
    coil = wound(
        tmp_path,
        Step(asked("clear"), Broke(ME, 60.0)),
        Step(asked("clear"), Note(ME, "too short to join")),
        Step(asked("clear"), End(ME, "the wire broke")),
        faults=Faults(wire_breaks_at_turn=60),
    )
    summary = coil.outcome.summary
    assert (summary.outcome, summary.verdict) == ("tripped", "not judged")
    assert "tension low" in summary.reason
    assert len(facts(tmp_path, WireBroke)) == 1


def test_a_wire_that_was_said_to_be_broken_is_not_wound_on_before_it_is_joined(tmp_path: Path) -> None:
    coil = wound(
        tmp_path,
        hold_at(70.0),
        Step(asked("go"), DrivesOff(ME, "to look")),
        hands(Broke(ME)),
        hands(Go(ME)),
        Step(asked("go", lambda seen: "joined" in seen.answer), Splice(ME)),
        Step(asked("go", lambda seen: seen.splices == 1), Go(ME)),
    )
    came_right(coil)
    kinds = [type(fact) for fact in facts(tmp_path, WireBroke, GoGiven, Spliced)]
    assert kinds[kinds.index(WireBroke) + 1] is Spliced


# ---------------------------------------------------------------- the count


def test_turns_are_taken_off_by_hand_and_wound_again(tmp_path: Path) -> None:
    def turn_back(bench: Bench) -> None:
        bench.plant.turn_by_hand(-20.0)
        goal.append(bench.board.count - 20 * 400)

    goal: list[int] = []
    coil = wound(
        tmp_path,
        hold_at(70.0),
        Step(asked("go"), Unwind(ME, 20.0)),
        hands(turn_back),
        Step(lambda seen, bench: seen.asks == "go" and bench.board.count <= goal[0], Go(ME)),
    )
    came_right(coil, TURNS - 0.01, TURNS + 0.01)
    (unwound,) = facts(tmp_path, Unwound)
    assert isinstance(unwound, Unwound)
    assert unwound.before - unwound.count == pytest.approx(20 * 400, abs=3)


@pytest.mark.parametrize(
    "faults", [Faults(index_lost_at_turn=50), Faults(encoder_sticks_at_turn=50)], ids=["index", "encoder"]
)
def test_a_count_that_was_lost_is_put_right_by_whoever_counts(tmp_path: Path, faults: Faults) -> None:
    def counted(bench: Bench) -> Request:
        return CountIs(ME, bench.plant.truth().true_turns)

    coil = wound(
        tmp_path,
        CLEAR,
        Step(lambda seen, _: seen.drives_off and seen.asks in ("go", "place"), counted),
        Step(asked("go", lambda seen: seen.hands is not None), Go(ME)),
        faults=faults,
    )
    came_right(coil, TURNS - 0.01, TURNS + 0.01)
    (corrected,) = facts(tmp_path, CountCorrected)
    assert isinstance(corrected, CountCorrected) and corrected.miscounted


def test_where_the_board_has_lost_the_count_a_go_is_not_enough(tmp_path: Path) -> None:
    coil = wound(
        tmp_path,
        CLEAR,
        Step(asked("place"), Go(ME)),
        Step(asked("place"), lambda bench: CountIs(ME, bench.plant.truth().true_turns)),
        Step(asked("go"), Go(ME)),
        faults=Faults(index_lost_at_turn=50),
    )
    came_right(coil, TURNS - 0.01, TURNS + 0.01)


@pytest.mark.parametrize(
    "nonsense",
    [CountIs(ME, 151.0), Unwind(ME, 500.0), Splice(ME, 100.0), Broke(ME, 100.0), NewWire(ME, "", 99.0)],
)
def test_what_cannot_be_is_answered_and_changes_nothing(tmp_path: Path, nonsense: Request) -> None:
    said: list[str] = []
    coil = wound(
        tmp_path,
        hold_at(70.0),
        Step(asked("go"), DrivesOff(ME, "to look")),
        hands(nonsense),
        Step(lambda seen, _: seen.answers == 2 and not said.append(seen.answer), Go(ME)),  # type: ignore[func-returns-value]  # kept for the assertion
    )
    came_right(coil, TURNS, TURNS)
    assert "turn" in said[-1]
    assert facts(tmp_path, CountCorrected, Spliced, WireBroke, WireChanged) == []
    assert len(facts(tmp_path, HandsAsked)) == 1


def test_a_miscount_is_put_right_and_the_guide_goes_where_the_program_has_it(tmp_path: Path) -> None:
    coil = wound(
        tmp_path,
        hold_at(70.0),
        Step(asked("go"), CountIs(ME, 66.5)),  # the drives are on: they go off first
        hands(CountIs(ME, 66.5)),
        Step(asked("go", lambda seen: seen.turns == 66.5), Go(ME)),
    )
    summary = coil.outcome.summary
    assert (summary.outcome, summary.turns) == ("finished", TURNS)
    assert coil.truth.true_turns > TURNS + 5.0  # nobody miscounted in truth: what was said is what is done
    (corrected,) = facts(tmp_path, CountCorrected)
    assert isinstance(corrected, CountCorrected) and corrected.miscounted
    program = order(RECIPE)[1].plan.program
    assert coil.bench.board.guide == program.place_of(TURNS * 400).guide


# ---------------------------------------------------------------- trips


@pytest.mark.parametrize(
    "faults",
    [
        Faults(guard_opens_at_tick=4000, closes_after_ticks=500),
        Faults(stop_opens_at_tick=4000, closes_after_ticks=500),
        Faults(belt_slips_at_turn=40),
    ],
    ids=["guard", "stop", "belt"],
)
def test_a_cause_that_is_put_right_is_cleared_and_the_coil_goes_on(tmp_path: Path, faults: Faults) -> None:
    put_right = Step(lambda seen, bench: seen.asks == "clear" and bench.ticks > 4510, Clear(ME))
    coil = wound(tmp_path, put_right, GO, faults=faults)
    came_right(coil, TURNS - 0.1, TURNS + 0.1)
    assert len(facts(tmp_path, Tripped)) == 1
    held = [event.cause for event in facts(tmp_path, Held) if isinstance(event, Held)]
    assert held == [Cause.TRIP, Cause.STOP_POINT]


def test_an_open_guard_is_not_cleared_and_the_board_says_why(tmp_path: Path) -> None:
    def close_it(bench: Bench) -> None:
        bench.plant.set_guard(closed=True)
        closed.append(bench.ticks)

    closed: list[int] = []
    coil = wound(
        tmp_path,
        CLEAR,
        Step(asked("clear", lambda seen: "the board refused: input open" in seen.says), close_it),
        Step(lambda seen, bench: seen.asks == "clear" and bench.ticks > closed[0] + 5, Clear(ME)),
        GO,
        faults=Faults(guard_opens_at_tick=4000),
    )
    came_right(coil, TURNS, TURNS)


def test_nothing_starts_by_clearing(tmp_path: Path) -> None:
    def stood(bench: Bench) -> None:
        standing.append(bench.plant.position)

    standing: list[int] = []
    coil = wound(
        tmp_path,
        Step(asked("clear"), stood),
        CLEAR,
        Step(asked("go"), stood),
        GO,
        faults=Faults(belt_slips_at_turn=40),
    )
    assert standing[0] == standing[1]
    came_right(coil, TURNS - 0.1, TURNS + 0.1)
    consents = [event.by for event in facts(tmp_path, GoGiven) if isinstance(event, GoGiven)]
    assert consents == ["virtual", "consent", "operator", "consent"]


def test_a_go_does_not_clear_a_trip(tmp_path: Path) -> None:
    coil = wound(
        tmp_path,
        Step(asked("clear"), Go(ME)),
        Step(asked("clear"), Note(ME, "typed go, to no avail")),
        Step(asked("clear", lambda seen: seen.answers == 1), End(ME, "enough")),
        faults=Faults(belt_slips_at_turn=40),
    )
    assert coil.outcome.summary.outcome == "tripped"
    assert coil.bench.board.state == BoardState.TRIPPED
    assert len(facts(tmp_path, Tripped)) == 1
