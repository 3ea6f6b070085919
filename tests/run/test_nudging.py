"""The flanges are taught by nudging: the guide's true place, asked of the plant, is what the taught datum
says, whatever the line, the person or the machine does meanwhile, and the first turn begins there."""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.run.showing import BAD, BY, GOOD, Showing, with_play
from windctl.protocol.messages import Setup
from windctl.record.events import GuideNudged, GuideSeen, HoldRequested, PassAgreed, Tripped
from windctl.record.guide_way import FAR, START, Leg, followed, nudge, to_start
from windctl.record.guide_way import Shown as Way
from windctl.run.guide_look import guide_look
from windctl.run.requests import Go, Nudge

# ------------------------------------------------------------ the legs of a nudge


def limits(play: int, high: int) -> Setup:
    return Setup(1, 400, 400, 10, 10, 100, 100, -play, high, 20, 20, 0, 0xFFFF, 3, 0)


@given(play=st.integers(0, 60), high=st.integers(1, 4000), steps=st.integers(-500, 500), far=st.booleans())
def test_a_nudge_moves_the_motor_by_its_steps_and_calls_the_new_place_what_the_old_one_was(
    play: int, high: int, steps: int, far: bool
) -> None:
    setup, at = limits(play, high), high if far else 0
    if steps == 0 or abs(steps) > high:
        return
    motor, called, before = at, at, []
    for leg in nudge(at, steps, setup):
        assert setup.guide_min <= leg.place <= setup.guide_max, "the board would refuse it"
        assert leg.place != called, "a status from before would end this leg"
        before.append(leg.place)
        if leg.declares is None:
            motor += leg.place - called
            last_way = leg.place - called
        else:
            assert called - leg.place == leg.declares
        called = leg.place
    assert (motor, called) == (at + steps, at)
    assert sum(leg.declares or 0 for leg in nudge(at, steps, setup)) == steps
    if play:
        assert last_way > 0, "it comes to its place moving away from the start flange"


@given(play=st.integers(0, 60), steps=st.integers(-200, 200).filter(bool), again=st.integers(1, 4))
def test_a_status_that_comes_again_ends_no_leg_twice(play: int, steps: int, again: int) -> None:
    shown = Way(way=nudge(0, steps, limits(play, 2000)))
    for leg in shown.way:
        for _ in range(again):
            shown = followed(shown, leg.place)
    assert shown.way == ()
    assert shown.shift == steps


def test_back_to_the_start_the_play_is_taken_up_as_at_the_begin_of_a_coil() -> None:
    assert to_start(limits(0, 2000)) == (Leg(0),)
    assert to_start(limits(30, 2000)) == (Leg(-30), Leg(0))


# ------------------------------------------------------------ on a good line


def at_far(show: Showing) -> Showing:
    show.look()
    assert (show.motor, show.state.shown.end) == (show.far, FAR)
    return show


def test_both_ends_are_nudged_and_seen_until_one_datum_suits_both() -> None:
    show = at_far(Showing())
    show.nudge(0.15)
    show.look()
    assert show.motor == show.far + 30  # 200 steps a millimetre
    show.seen()
    show.look()
    assert (show.state.shown.end, show.motor) == (START, 30)
    show.nudge(-0.05)
    show.look()
    show.nudge(-0.05)
    show.look()
    assert show.motor == 10
    show.seen()
    show.look()
    assert (show.state.shown.end, show.motor) == (FAR, show.far + 10), "the far end is shown again"
    show.seen()
    assert show.asked("go") == "go"
    assert (show.motor, show.board.guide) == (10, 0), "and the guide is back at its start"
    show.wind()
    assert show.turned_from == 10
    seen = [(event.end, event.shift, event.apart_mm) for event in show.facts if isinstance(event, GuideSeen)]
    assert seen == [(FAR, 30, 0.0), (START, 10, pytest.approx(0.1)), (FAR, 10, 0.0)]
    assert sum(isinstance(event, PassAgreed) for event in show.facts) == 1, "one go for all of it"
    show.told_the_same()


def test_nothing_nudged_is_a_dry_pass_as_ever() -> None:
    show = at_far(Showing())
    show.seen()
    show.look()
    show.seen()
    show.wind()
    assert show.turned_from == 0
    assert [event.shift for event in show.facts if isinstance(event, GuideSeen)] == [0, 0]


def test_that_the_gap_is_not_the_recipes_is_said_with_what_to_do_and_bars_nothing() -> None:
    show = at_far(Showing())
    show.nudge(0.2)
    show.look()
    show.seen()
    show.look()
    look = guide_look(show.state, show.per_mm)
    assert look is not None
    assert look.apart == ""
    show.nudge(-0.1)
    show.look()
    show.seen()
    show.look()
    look = guide_look(show.state, show.per_mm)
    assert look is not None
    # The recipe's text: a gap of 11 mm, margins of 0.3 mm; the ends were seen at +0.20 and +0.10 mm.
    way = f"{show.far / show.per_mm:.2f}"
    for words in (
        f"0.10 mm further apart than the program's {way} mm",
        "bobbin.flange_gap_mm = 11, lay.margin_mm = 0.3",
        "gap by +0.10 mm or each margin by -0.05 mm",
        "nudge 0.05 mm towards the far flange here",
    ):
        assert words in look.apart, look.apart
    show.nudge(0.05)
    show.look()
    show.seen()
    show.look()
    look = guide_look(show.state, show.per_mm)
    assert look is not None
    assert look.apart == "", "0.05 mm are nothing to speak of"
    show.seen()
    show.wind()
    assert show.turned_from == 30  # halfway between +0.20 and +0.10 mm


def test_the_drives_play_is_taken_up_before_anything_is_looked_at() -> None:
    """What the eye sees is the carriage, not the motor: at each look it stands where the motor says."""
    show = at_far(Showing(profile=with_play(0.15)))
    guide = show.plant.guide
    begun = guide.next_mm() - show.far / show.per_mm
    for mm in (-0.1, 0.05, -0.3):
        before = guide.next_mm()
        show.nudge(mm)
        show.look()
        assert guide.next_mm() - before == pytest.approx(mm, abs=1e-9)
    show.seen()
    show.look()
    assert guide.next_mm() - begun == pytest.approx(-0.35, abs=1e-9)
    show.nudge(-0.2)
    show.look()
    assert guide.next_mm() - begun == pytest.approx(-0.55, abs=1e-9)
    show.seen()
    show.look()
    show.seen()
    show.wind()
    assert show.turned_from == round(-0.55 * show.per_mm)


# ------------------------------------------------------------ limits


@pytest.mark.parametrize(
    ("mm", "says"),
    [
        (1.05, "1.05 mm are more than the 1 mm of one nudge"),
        (-2.0, "-2 mm are more than the 1 mm of one nudge"),
        (0.0, "0 mm move nothing"),
    ],
)
def test_what_one_nudge_may_not_be_is_refused_with_the_limit(mm: float, says: str) -> None:
    show = at_far(Showing())
    assert says in show.nudge(mm)
    show.run(300)
    assert show.motor == show.far


def test_nudging_ends_three_millimetres_from_where_the_guide_was_put_and_leads_back() -> None:
    show = at_far(Showing())
    for _ in range(3):
        show.nudge(1.0)
        show.look()
    says = show.nudge(0.05)
    assert "3.05 mm from where the guide was put" in says
    assert "3.00 mm at the most" in says
    assert "by hand" in says
    show.run(300)
    assert show.motor == show.far + 600
    assert show.nudge(-0.05) == ""
    show.look()
    assert show.motor == show.far + 590


def test_the_way_that_the_machine_has_bounds_it_too() -> None:
    profile = with_play(0.0)
    guide = profile.guide.model_copy(update={"travel_mm": 10.5})
    show = at_far(Showing(profile=profile.model_copy(update={"guide": guide})))
    says = show.nudge(0.5)
    assert "guide.travel_mm" in says
    assert f"{10.5 - show.far / show.per_mm:.2f} mm at the most" in says


def test_a_nudge_where_nothing_is_looked_at_does_nothing() -> None:
    show = Showing()
    show.asked("pass")
    assert "in a dry pass" in show.nudge(0.1)
    show.say(Go(BY))
    show.until(lambda: show.board.guide > 300)
    assert show.nudge(0.1) == ""  # it is on its way: another key says nothing
    assert not any(isinstance(event, GuideNudged) for event in show.facts)
    at_far(show)


def test_keys_that_repeat_queue_nothing_up() -> None:
    """A key held down sends thirty a second. What comes while the guide moves is not made up for later."""
    show = at_far(Showing())
    before = show.motor
    for _ in range(30):
        show.nudge(0.05)
        show.run(33)
    made = sum(isinstance(event, GuideNudged) for event in show.facts)
    show.look()
    show.run(500)
    assert show.motor == before + 10 * made
    assert 5 <= made < 30


# ------------------------------------------------------------ interruptions


@pytest.mark.parametrize("end", [FAR, START])
@pytest.mark.parametrize("mm", [0.5, -0.5])
@pytest.mark.parametrize("late", [0, 5, 40, 75, 100, 200])
def test_a_hold_within_a_nudge_leaves_a_datum_that_is_true(end: str, mm: float, late: int) -> None:
    show = at_far(Showing())
    if end == START:
        show.seen()
        show.look()
    show.nudge(mm)
    show.run(late)
    show.hold()
    stands = show.motor
    show.run(300)
    assert abs(show.motor - stands) <= HOST_DELAY_STEPS, "the hold ends it at once"
    assert any(isinstance(event, HoldRequested) for event in show.facts)
    show.asked("go")
    assert show.state.shown.unsure is None
    assert show.shift == show.state.shown.shift
    assert show.shift in (0, round(mm * show.per_mm))
    show.wind()
    assert show.turned_from == show.state.shown.shift
    show.told_the_same()


HOST_DELAY_STEPS = 20  # ten milliseconds at 2000 steps/s


def test_a_limit_switch_within_a_nudge_loses_the_place_and_the_pass_is_made_anew() -> None:
    show = at_far(Showing())
    show.nudge(0.5)
    show.run(40)
    show.limit_switch()
    assert show.asked("clear") == "clear"
    assert any(isinstance(event, Tripped) for event in show.facts)
    assert show.state.guide_lost
    show.clear()
    assert show.asked("pass") == "pass"
    show.look()
    assert (show.motor, show.shift) == (show.far, 0)
    show.seen()
    show.look()
    show.seen()
    show.wind()
    assert show.turned_from == 0


def test_a_board_that_starts_again_within_a_pass_asks_for_the_guide_by_hand() -> None:
    show = at_far(Showing())
    show.reset()
    assert show.asked("pass") == "pass"
    assert show.state.guide_lost
    assert show.motor == show.far, "nothing moved of itself"
    show.look()
    assert (show.motor, show.shift) == (show.far, 0)


@pytest.mark.parametrize("after", [5, 30, 80])
def test_a_line_that_is_gone_within_a_nudge_ends_the_pass(after: int) -> None:
    show = at_far(Showing())
    show.nudge(0.5)
    show.run(after)
    show.dead = True
    show.until(lambda: not show.dead)  # given up, and taken up again
    show.asked("go")
    assert show.shift == show.state.shown.shift
    assert show.shift in (0, 100)
    show.wind()
    assert show.turned_from == show.state.shown.shift
    show.told_the_same()


@pytest.mark.parametrize("forgets", [0, 150])
@pytest.mark.parametrize("after", [5, 40, 90, 140])
@pytest.mark.parametrize("mm", [0.5, -0.5])
def test_a_program_that_dies_within_a_nudge_finds_the_datum_as_the_board_has_it(
    mm: float, after: int, forgets: int
) -> None:
    """What the board said last may be missing in the record: the guide goes by the board's word."""
    show = at_far(Showing())
    show.nudge(mm)
    show.run(after)
    show.killed(forgets)
    show.asked("go")
    shift = show.shift
    assert shift in (0, round(mm * show.per_mm)), "once or not at all"
    show.wind()
    assert show.turned_from == shift
    show.told_the_same()


# ------------------------------------------------------------ anything in any order, over a bad line

NUDGES = st.tuples(st.just("nudge"), st.integers(-20, 20).filter(bool), st.integers(0, 250))
OTHERS = st.tuples(
    st.sampled_from(["seen", "seen", "seen", "twice", "hold", "cut", "switch", "reset"]),
    st.integers(-20, 20).filter(bool),
    st.integers(0, 250),
)


ANYTHING = given(
    script=st.lists(st.one_of(NUDGES, NUDGES, OTHERS), min_size=2, max_size=9),
    seed=st.integers(0, 2**32),
    bad=st.booleans(),
    play=st.sampled_from([0.0, 0.15]),
)


@settings(max_examples=12, deadline=None)
@ANYTHING
def test_whatever_happens_the_first_turn_begins_where_the_taught_datum_says(
    script: list[tuple[str, int, int]], seed: int, bad: bool, play: float
) -> None:
    play_out(script, seed, bad, play)


@pytest.mark.long
@pytest.mark.timeout(1200)
@settings(max_examples=600, deadline=None)
@ANYTHING
def test_whatever_happens_six_hundred_times(
    script: list[tuple[str, int, int]], seed: int, bad: bool, play: float
) -> None:
    play_out(script, seed, bad, play)


def play_out(script: list[tuple[str, int, int]], seed: int, bad: bool, play: float) -> None:
    """Nudges and accidents in order, then to the first turn."""
    show = Showing(BAD if bad else GOOD, seed, with_play(play))
    for what, twentieths, later in script:
        show.look()
        _truth(show)
        agreed, before, shift = show.state.pass_agreed, show.motor, show.state.shown.shift
        match what:
            case "seen":
                show.seen()
            case "cut":
                show.run(later)
                show.dead = True
                show.run(100 + 14 * later)
                show.dead = False
            case _:
                show.nudge(twentieths / 20)
                if what == "twice":
                    show.nudge(twentieths / 20)
                made = show.state.shown.way != ()
                steps = round(twentieths / 20 * show.per_mm) if made else 0
                if what in ("hold", "switch", "reset"):
                    show.run(later)
                    {"hold": show.hold, "switch": show.limit_switch, "reset": show.reset}[what]()
                    show.run(400)  # until it has been heard of
                show.look()
                _truth(show)
                if show.state.pass_agreed is agreed:
                    assert show.motor == before + steps, "once, and by so much"
                elif show.shift:
                    assert show.shift in (shift, shift + steps)
    show.wind()
    assert show.turned_from == show.state.shown.shift
    if show.seen_through:
        assert show.seen_through == {START: show.turned_from, FAR: show.turned_from + show.far}
    show.told_the_same()


def _truth(show: Showing) -> None:
    """At a look: the guide stands where it is to be seen, and the shift told is the true one."""
    assert show.decision.asks == "look"
    assert show.board.guide == (show.far if show.state.shown.end == FAR else 0)
    assert show.shift == show.state.shown.shift


def test_a_frame_that_is_sent_again_and_again_declares_once() -> None:
    """Its answer is lost for a while: the same bytes go out again, the datum shifts once."""
    show = at_far(Showing())
    show.nudge(0.5)
    show.until(lambda: show.state.shown.way == () or show.talk.board.declared is not None)
    show.dead = True
    show.run(600)
    show.dead = False
    show.look()
    assert show.shift == show.state.shown.shift == 100
    assert show.say(Nudge(BY, -0.5)) == ""
    show.look()
    assert show.shift == 0
