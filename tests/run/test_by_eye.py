"""Coils on a bench without a board: turns read off a counter and typed, readings typed, all else as ever."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from tests.run.by_eye import MACHINE, TO_RESISTANCE, TO_TURNS, bench, checks, counts_only, gone_on
from windctl.cli.main import run
from windctl.record.events import (
    CheckTaken,
    CoilFinished,
    CounterRead,
    GoGiven,
    ReadingTakenBack,
    ReadingTyped,
    Spliced,
    StatusHeard,
)
from windctl.record.fold import replay
from windctl.run.requests import (
    CountIs,
    DrivesOff,
    End,
    Go,
    Hold,
    Read,
    Skip,
    Slower,
    Splice,
    TakeBack,
    Unwind,
)


def test_a_whole_coil_to_a_resistance_with_two_typed_readings(tmp_path: Path) -> None:
    """Facts, seal, replay; the true coil is within, and what is said of it holds it."""
    book = tmp_path / "a.book"
    with bench(TO_RESISTANCE, book, checks()) as at:
        seen = at.winding.look()
        assert (seen.phase, seen.asks, seen.turns) == ("waiting", "count", 0.0)
        assert seen.says.startswith("set the counter to 0; wind to 7 ")
        foreseen, first = seen.stop_turn, seen.stop_u95
        at.counter(3000)
        seen = at.reads()
        assert seen.stop_turn is not None and seen.stop_u95 is not None and first is not None
        assert seen.stop_turn != foreseen
        assert seen.stop_u95 < 0.3 * first  # and yet it holds the turn that meets the target
        assert 0 < at.coil.turn_for(5800.0) - seen.stop_turn <= 1.5 * seen.stop_u95
        assert seen.says.startswith("insulate the bared spot again; ") and seen.bared
        assert f"wind to {seen.stop_turn:,.0f} and read the counter".replace(",", " ") in seen.says
        assert f"; slow down at {seen.stop_turn - 50:,.0f}".replace(",", " ") in seen.says
        at.counter(seen.stop_turn)
        asked = at.waits_for("reading")
        assert (asked.phase, asked.check is not None) == ("reading", True)
        at.reads()
        seen = at.waits_for("count")
        assert seen.stop_turn is not None and seen.stop_turn > asked.turns
        assert seen.says.startswith("insulate the bared spot again; wind to ")
        at.counter(seen.stop_turn)
        outcome = at.ends()
        summary = outcome.summary
        assert (outcome.left, summary.reason, summary.verdict) == ("finished", "the target is met", "within")
        assert summary.turns is not None and summary.dcr_20c_ohm is not None
        true = at.coil.ohm(summary.turns)
        assert abs(true - 5800.0) <= 0.02 * 5800.0
        assert abs(true - summary.dcr_20c_ohm) <= (summary.dcr_u95_ohm or 0.0)
        events = at.events()
        ended = at.winding.wait(0.0)
        assert ended is not None and replay(events) == ended.state
        assert at.book.verify().broken == ()
        assert not [event for event in events if isinstance(event, GoGiven)]  # nobody agreed to anything
        assert len([event for event in events if isinstance(event, CheckTaken)]) == 1
        (lesson,) = at.book.lessons()
        assert not lesson.lesson.simulated
        assert lesson.lesson.measured
        assert [point.turn for point in at.book.curve(outcome.number)] == [3000.0, asked.turns]


def test_the_forecast_is_that_of_the_same_readings_in_a_file(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """To the last bit: `windctl forecast` is told when they were taken, as the run knows."""
    with bench(TO_RESISTANCE, tmp_path / "a.book", checks()) as at:
        at.counter(2000)
        at.reads(21.0)
        at.counter(5000)
        seen = at.reads(22.5)
        at.close()
        ticks, lines = 0, ["turn,ohm,celsius,state,seconds"]
        events = at.events()
    for event in events:
        if isinstance(event, StatusHeard):
            ticks = event.status.ticks
        elif isinstance(event, ReadingTyped):
            lines.append(f"{event.turn},{event.ohm!r},{event.celsius},rest,{ticks / 1000.0}")
    recipe, readings = tmp_path / "coil.toml", tmp_path / "readings.csv"
    recipe.write_text(TO_RESISTANCE, encoding="utf-8")
    readings.write_text("\n".join(lines) + "\n", encoding="utf-8")
    arguments = ["forecast", str(recipe), str(readings), "--machine", str(MACHINE), "--json"]
    book = ["--book", str(tmp_path / "none.book")]
    assert run([*arguments, *book, "--at-turn", f"{seen.stop_turn}"]) == 0
    last = json.loads(capsys.readouterr().out)["rows"][-1]
    assert last["turn"] == 5000
    assert last["final_ohm"] == seen.finish_ohm
    assert (last["high_ohm"] - last["low_ohm"]) / 2.0 == seen.finish_u95


@pytest.mark.parametrize(
    ("turn", "verdict", "reason"),
    [
        (800, "within", "the turns asked for are wound"),
        (806, "within", "6 turns more than asked for"),
        (810, "outside", "10 turns more than asked for"),
    ],
)
def test_a_counter_that_overshoots_is_recorded_as_it_is_and_judged(
    tmp_path: Path, turn: int, verdict: str, reason: str
) -> None:
    """The program ends at 800 turns; 1 % is 8."""
    with bench(TO_TURNS, tmp_path / "a.book", counts_only()) as at:
        at.counter(500)
        seen = at.counter(turn)
        past = f", {turn - 800} turns past the stop at 800" if turn > 800 else ""
        assert seen.answer == f"noted: {turn} turns{past}"
        summary = at.ends().summary
        assert (summary.turns, summary.verdict, summary.reason) == (turn, verdict, reason)
        assert at.book.verify().broken == ()


def test_far_beyond_the_stop_is_asked_about_and_believed_when_it_is_said_again(tmp_path: Path) -> None:
    with bench(TO_TURNS, tmp_path / "a.book", counts_only()) as at:
        at.counter(300)
        seen = at.counter(3010)
        assert seen.answer == (
            "3 010 is 2 210 turns past the stop at 800; if the counter really says so, say 3 010 once more"
        )
        assert (seen.turns, seen.asks) == (300.0, "count")
        seen = at.counter(3000)  # another number is asked about again
        assert seen.turns == 300.0
        assert at.counter(30_000).answer == "30 000 turns cannot be: this coil has 800 at the most"
        assert at.counter(310.5).answer == "whole turns are meant: 310 or 311"
        at.counter(3000)
        assert at.winding.look().turns == 3000.0
        kinds = [(event.turn, event.doubted) for event in at.events() if isinstance(event, CounterRead)]
        assert kinds == [(300, False), (3010, True), (3000, True), (3000, False)]


def test_a_mistyped_turn_is_taken_back_or_put_right_by_the_next(tmp_path: Path) -> None:
    with bench(TO_TURNS, tmp_path / "a.book", counts_only(), faster=1.0) as at:
        at.counter(100)
        before = at.winding.look()
        assert at.counter(800).phase == "settling"  # 80 was meant; it would end the coil
        seen = at.says(TakeBack("operator"))
        assert seen.answer == "the turn typed last is taken back: 100 turns, as before"
        assert (seen.turns, seen.stop_turn, seen.phase) == (before.turns, before.stop_turn, "waiting")
        at.counter(700)
        assert at.counter(170).answer == "noted: 170 turns lie on the bobbin, not 700"
        assert at.winding.look().finish_ohm == before.finish_ohm  # nothing was read, so nothing is another
        assert len([event for event in at.events() if isinstance(event, ReadingTakenBack)]) == 1


def test_a_turn_that_lacks_a_digit_is_asked_about(tmp_path: Path) -> None:
    with bench(TO_TURNS, tmp_path / "a.book", counts_only()) as at:
        at.counter(700)
        for typed in (70, 0):
            seen = at.counter(typed)
            assert f"{typed} is far less than the 700 turns that were said before" in seen.answer
            assert seen.turns == 700.0
        assert at.counter(0).turns == 0.0


def test_a_turn_below_the_last_reading_is_asked_about_since_one_of_the_two_is_wrong(tmp_path: Path) -> None:
    with bench(TO_RESISTANCE, tmp_path / "a.book", checks()) as at:
        at.counter(3000)
        read = at.reads()
        seen = at.counter(2000)
        assert "2 000 is less than the 3 000 turns at which the coil was last read" in seen.answer
        assert seen.turns == 3000.0
        seen = at.counter(2000)
        assert seen.turns == 2000.0
        now, before = seen.ohm_20c_now, read.ohm_20c_now
        assert now == pytest.approx(before)  # the resistance was right, and its turn was not
        seen = at.says(TakeBack("operator"))
        assert (seen.turns, seen.ohm_20c_now) == (3000.0, before)


def test_turns_that_are_taken_off_are_no_wrong_count(tmp_path: Path) -> None:
    with bench(TO_RESISTANCE, tmp_path / "a.book", checks()) as at:
        at.counter(3000)
        read = at.reads()
        told = at.says(Unwind("operator", 50.0))
        assert told.answer == "Turn the spindle back by hand, then type turn and what the counter says."
        assert told.says == "turn the spindle back by hand, then say what the counter says"
        seen = at.counter(2950)
        assert seen.turns == 2950.0
        assert seen.ohm_20c_now is not None and read.ohm_20c_now is not None
        per_turn = read.ohm_20c_now / 3000
        assert seen.ohm_20c_now == pytest.approx(read.ohm_20c_now - 50 * per_turn, rel=0.005)
        (last,) = [event for event in at.events() if isinstance(event, CounterRead)][-1:]
        assert not (last.doubted or last.recounted)


def test_a_splice_beyond_what_was_told_and_one_behind_it(tmp_path: Path) -> None:
    with bench(TO_TURNS, tmp_path / "a.book", counts_only()) as at:
        at.says(Splice("operator", 210.0))  # the first that anybody hears of this coil
        assert (at.winding.look().turns, at.winding.look().splices) == (210.0, 1)
        at.counter(400)
        seen = at.says(Splice("operator", 380.0))
        assert seen.answer.endswith(
            "winding goes on from there; turn the spindle back until the counter says 380"
        )
        assert (seen.turns, seen.splices) == (380.0, 2)
        seen = at.says(Splice("operator", 4000.0))
        assert "4 000 is 3 200 turns past the stop" in seen.answer
        assert seen.splices == 2
        told = [event for event in at.events() if isinstance(event, Spliced | CounterRead)]
        assert [type(event) for event in told][:2] == [CounterRead, Spliced]


def test_another_run_goes_on_where_the_record_ends_and_the_counter_puts_it_right(tmp_path: Path) -> None:
    """Even past the program's end, which no board would call its own."""
    book = tmp_path / "a.book"
    with bench(TO_TURNS, book, counts_only()) as at:
        at.counter(500)
        at.says(Hold("operator", "the hold key"))
        number, prior = at.winding.number, at.coil.prior
    with gone_on(number, book, prior) as at:
        seen = at.winding.look()
        assert (seen.turns, seen.asks) == (500.0, "count")
        assert seen.says.startswith("the record ends at turn 500, say so if the counter differs; wind to 800")
        assert at.counter(512).says.startswith("wind to 800")
        at.counter(810)
    with gone_on(number, book, prior) as at:
        seen = at.winding.look()
        assert (seen.turns, seen.asks, seen.phase) == (
            810.0,
            "count",
            "waiting",
        )  # it might have been mistyped
        assert seen.says == "the record ends at turn 810, it was to stop at 800: say what the counter says"
        at.counter(810)
        outcome = at.ends()
        assert (outcome.left, outcome.summary.turns, outcome.summary.verdict) == (
            "finished",
            810.0,
            "outside",
        )
        assert at.book.verify().broken == ()


def test_what_needs_a_board_is_answered_in_words_and_changes_nothing(tmp_path: Path) -> None:
    power = "windctl cannot start, slow or stop this machine"
    with bench(TO_TURNS, tmp_path / "a.book", counts_only()) as at:
        at.counter(100)
        for request, words in (
            (Go("operator"), f"{power}: wind on yourself, then type turn and what the counter says"),
            (DrivesOff("operator", "asked for"), f"{power}: switch it off yourself"),
            (Slower("operator"), "the pace is your own motor's: windctl does not drive this spindle"),
            (Skip("operator"), "there is no check to pass over"),
        ):
            facts = len(at.winding.facts())
            assert at.says(request).answer == words
            assert len(at.winding.facts()) == facts
        seen = at.says(Hold("operator", "the hold key"))
        assert (seen.answer, seen.phase) == (f"{power}: stop it yourself", "held")
        seen = at.counter(120)
        assert (seen.phase, seen.pace_rpm, seen.seconds_left, seen.celsius) == ("waiting", 0.0, None, None)
        at.winding.request(End("operator", "ended by the operator"))
        at.ends()
        (finished,) = [event for event in at.events() if isinstance(event, CoilFinished)]
        assert (finished.outcome, finished.turns) == ("stopped", 120.0)


def test_a_first_number_is_no_reason_to_ask(tmp_path: Path) -> None:
    """Somebody may wind all of it before they type at all."""
    with bench(TO_TURNS, tmp_path / "a.book", counts_only()) as at:
        assert at.says(CountIs("operator", 795)).answer == "noted: 795 turns"


def test_a_reading_that_the_coil_cannot_have_is_told_as_an_alarm_and_taken_back(tmp_path: Path) -> None:
    """A turn that was typed wrong shows in the next reading."""
    with bench(TO_RESISTANCE, tmp_path / "a.book", checks()) as at:
        at.counter(2000)
        at.reads()
        at.counter(4400)  # 3400 was meant
        shown = at.coil.shown(3400, 22.0)
        seen = at.says(Read("operator", shown, 22.0))
        assert "does not fit the expected" in seen.answer
        assert seen.alarm.endswith("is not used: measure again, and check the count")
        seen = at.says(TakeBack("operator"))
        assert seen.alarm == ""
        at.counter(3400)
        assert at.says(Read("operator", shown, 22.0)).readings_used == 2


def test_a_turn_that_is_given_on_going_on_may_be_past_the_program(tmp_path: Path) -> None:
    book = tmp_path / "a.book"
    with bench(TO_TURNS, book, counts_only()) as at:
        at.counter(700)
        number, prior = at.winding.number, at.coil.prior
    with gone_on(number, book, prior, at_turn=806.0) as at:
        summary = at.ends().summary
        assert (summary.turns, summary.verdict) == (806.0, "within")


def test_a_coil_for_turns_may_be_read_where_it_ends(tmp_path: Path) -> None:
    """In the moment before it ends; and so it teaches, though nobody asked."""
    with bench(TO_TURNS, tmp_path / "a.book", counts_only(), faster=4.0) as at:
        assert at.counter(800).phase == "settling"
        assert at.reads().readings_used == 1
        summary = at.ends().summary
        assert (summary.reason, summary.verdict) == ("the turns asked for are wound", "within")
        assert summary.dcr_20c_ohm == pytest.approx(at.coil.ohm(800), rel=0.01)
        (lesson,) = at.book.lessons()
        assert lesson.lesson.measured
