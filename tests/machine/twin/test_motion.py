"""How the board drives the spindle: to exactly where it must stand, by v^2 = 2*a*s, and never beyond."""

from __future__ import annotations

import math
from itertools import pairwise

import pytest
from hypothesis import assume, example, given, settings
from hypothesis import strategies as st

from tests.machine.twin.ideal import HAND_GUIDED, Machine
from windctl.protocol import messages as m
from windctl.protocol.messages import Cause, Refusal, State, Trip


def test_it_stands_exactly_at_the_stop_point_and_says_so() -> None:
    machine = Machine().prepare().arm(stop=200 * 400).go()
    machine.run_to_rest()
    board = machine.board
    assert (board.state, board.cause, board.count) == (State.HELD, Cause.STOP_POINT, 200 * 400)
    [standing] = machine.notices(m.NoticeKind.STANDING)
    assert (standing.a, standing.b) == (board.count, board.guide)
    assert machine.outputs.drive_enable == 1  # stop category 2 keeps the power


def test_pace_rises_and_falls_at_the_rates_of_setup() -> None:
    machine = Machine().prepare().arm(pace=6000, stop=400 * 400).go()
    machine.run_to_rest()
    paces = machine.paces
    top = paces.index(6000)
    rising = [p for p in paces[:top] if p > 0]
    assert len(rising) == pytest.approx(6000 / 2000 * 1000, abs=2)  # t = v / a
    falling = [p for p in paces[top:] if 0 < p < 6000]
    fall = (falling[0] - falling[-500]) / (len(falling) - 500)
    assert fall * 1000 == pytest.approx(3333, rel=0.01)
    assert max(paces) == 6000


def test_the_braking_distance_is_that_of_constant_deceleration() -> None:
    machine = Machine().winding(pace=6000)
    begin = machine.board.count
    machine.say(m.Hold())
    machine.run_to_rest()
    assert machine.board.count - begin == pytest.approx(6000**2 / (2 * 3333), rel=0.01)  # s = v^2 / 2a


@settings(max_examples=60)
@given(
    way=st.integers(1, 12_000),
    pace=st.integers(1000, 15_000),
    accel=st.integers(100, 65_535),
    decel=st.integers(1500, 65_535),
    counts=st.sampled_from([1, 2, 4, 24, 100, 200, 400]),
    steps=st.sampled_from([1, 48, 200, 400, 800]),
)
def test_no_pace_rate_or_resolution_makes_it_pass_the_stop_point(
    way: int, pace: int, accel: int, decel: int, counts: int, steps: int
) -> None:
    stop = way * counts // steps  # from a way in steps, so that no example takes long
    assume(stop >= 1)
    machine = Machine()
    limits = {"counts_per_turn": counts, "steps_per_turn": steps, "accel": accel, "decel": decel}
    machine.prepare(max_pace=15_000, slip_counts=3, max_count=stop + 2, fitted=HAND_GUIDED, **limits)
    machine.arm(pace, stop)
    if stop * steps < counts:  # less than a step away
        assert machine.refusal(m.Go(*machine.consent)) == (Refusal.RANGE, stop)
        return
    machine.go()
    machine.run_until(lambda: machine.board.standing, at_most=40_000)
    board = machine.board
    assert (board.state, board.trip) == (State.HELD, Trip.NONE)
    assert board.count <= stop
    assert (stop - board.count) * steps < counts  # not a whole step short


@settings(max_examples=40)
@given(
    way=st.integers(1500, 12_000),
    accel=st.integers(500, 65_535),
    decel=st.integers(1500, 65_535),
    resolution=st.sampled_from([(1, 400), (2, 400), (24, 400), (100, 400), (400, 400), (400, 200)]),
    phase=st.integers(0, 399),
)
@example(
    way=1652, accel=36_472, decel=3721, resolution=(1, 400), phase=217
)  # short, quick to start, slow to stop
@example(way=4524, accel=38_284, decel=1682, resolution=(1, 400), phase=77)
def test_it_comes_to_its_stand_without_a_jerk_wherever_the_counter_begins(
    way: int, accel: int, decel: int, resolution: tuple[int, int], phase: int
) -> None:
    counts, steps = resolution
    stop = way * counts // steps
    machine = Machine()
    machine.step = phase
    machine.position = phase * counts // steps
    limits = {"counts_per_turn": counts, "steps_per_turn": steps, "accel": accel, "decel": decel}
    machine.prepare(slip_counts=3, max_count=stop + 2, fitted=HAND_GUIDED, **limits).arm(8000, stop).go()
    machine.run_until(lambda: machine.board.standing, at_most=40_000)
    assert machine.board.count <= stop
    drops = [a - b for a, b in pairwise(machine.paces) if b]
    assert max(drops, default=0) <= decel // 1000 + 1
    last = max(a for a, b in pairwise(machine.paces) if not b)
    # sqrt(2*decel*left) with a few steps left: the dead time of a tick or two, the place of a coarse count
    assert last <= math.isqrt(2 * decel * 8) + 3 * (decel // 1000 + 1)


def coarse(turns: int, phase: int = 250) -> Machine:
    """A counter of one count a turn, setting out from the middle of a count."""
    machine = Machine()
    machine.step = phase
    limits = {"counts_per_turn": 1, "max_count": turns, "slip_counts": 3, "fitted": HAND_GUIDED}
    return machine.prepare(**limits).arm(8000).go()


def stands(machine: Machine) -> int:
    """How often the rate became 0 after it was not."""
    return sum(1 for a, b in pairwise(machine.paces) if a and not b)


def test_a_coarse_counter_stops_at_its_count_in_one_go() -> None:
    machine = coarse(20)
    machine.run_to_rest()
    assert machine.board.count == 20
    assert stands(machine) == 1


def test_a_coarse_counter_that_comes_early_is_believed_at_once() -> None:
    machine = coarse(20)
    machine.run_until(lambda: machine.board.count == 10)
    machine.step += 150  # the spindle is ahead of its motor
    machine.run_to_rest()
    assert (machine.board.count, stands(machine)) == (20, 1)
    assert max(a for a, b in pairwise(machine.paces) if not b) <= 200


def test_what_is_missing_on_a_coarse_counter_is_made_up_for_at_a_creep() -> None:
    machine = coarse(20)
    machine.run_until(lambda: machine.board.count == 10)
    machine.step -= 150  # the belt has slipped
    machine.run_to_rest()
    assert (machine.board.count, stands(machine)) == (20, 2)
    stand = next(i for i, (a, b) in enumerate(pairwise(machine.paces)) if a and not b)
    assert max(machine.paces[stand + 1 :]) == math.isqrt(8 * 3333)


def test_a_counter_that_trails_behind_the_steps_is_no_overshoot() -> None:
    machine = Machine()
    machine.lag = 9
    machine.prepare(fitted=HAND_GUIDED).arm(stop=30_000).go()
    highest = 0
    while machine.board.state == State.TURNING:
        machine.run()
        highest = max(highest, machine.position)
    assert machine.board.count == machine.step == highest == 30_000


def test_pushed_onto_the_stop_point_by_hand_it_issues_no_further_step() -> None:
    machine = Machine().prepare(fitted=HAND_GUIDED, slip_counts=400).arm(pace=3000, stop=30_000).go()
    machine.run_until(lambda: machine.board.count >= 29_900)
    machine.turn(30_000 - machine.board.count)
    machine.run()
    steps = machine.step
    machine.run(200)
    assert machine.step <= steps + 3000 // 1000
    assert machine.board.state == State.HELD


@settings(max_examples=40)
@given(data=st.data(), max_count=st.integers(20_000, 60_000), queue_end=st.integers(20_000, 60_000))
def test_stop_points_that_come_and_go_never_lead_beyond_any_limit(
    data: st.DataObject, max_count: int, queue_end: int
) -> None:
    machine = Machine().prepare([(queue_end, 0)], max_count=max_count)
    machine.arm(pace=8000).go()
    limit = min(max_count, queue_end)
    stands_at = limit
    for _ in range(data.draw(st.integers(1, 5))):
        machine.run(data.draw(st.integers(1, 2500)))
        if machine.board.state != State.TURNING:
            break
        answer = machine.do(m.StopAt(*machine.consent, data.draw(st.integers(0, max_count))))
        stands_at = answer.value
        assert stands_at <= limit
    machine.run_to_rest()
    assert machine.board.count == stands_at
    assert machine.board.state == State.HELD


def test_a_stop_point_inside_the_braking_distance_brakes_now_and_is_foretold() -> None:
    machine = Machine().winding(pace=8000)
    count, pace = machine.board.count, machine.board.spindle.v
    answer = machine.do(m.StopAt(*machine.consent, count + 10))
    needed = pace**2 / (2 * 3333)
    assert needed <= answer.value - count <= needed + 30  # v^2 / 2a, and what the next two ticks bring
    assert machine.statuses()[-1].stop_point in (answer.value, 0xFFFFFFFF)
    again = machine.do(m.StopAt(*machine.consent, count + 10))
    assert again.value <= answer.value
    machine.run_to_rest()
    assert machine.board.count == again.value
    assert machine.board.cause == Cause.STOP_POINT
    assert max(a for a, b in pairwise(machine.paces) if not b) <= 200  # and without a jerk


def test_braking_now_keeps_to_the_rate_of_braking_to_the_last_step() -> None:
    machine = Machine().winding(pace=15_000, max_pace=15_000, accel=9000, decel=1500, fitted=HAND_GUIDED)
    answer = machine.do(m.StopAt(*machine.consent, machine.board.count + 1))
    machine.run_to_rest()
    assert machine.board.count == answer.value
    last = max(a for a, b in pairwise(machine.paces) if not b)
    assert last <= math.isqrt(
        2 * 1500 * 19 // 2
    )  # half a tick's 15 steps, and two, from where it has to stand


def test_a_stop_point_that_comes_while_a_hold_brakes_is_not_one_that_is_then_passed() -> None:
    machine = Machine().winding(pace=8000)
    machine.say(m.Hold())
    machine.run(3)
    answer = machine.do(m.StopAt(*machine.consent, machine.board.count + 5))
    machine.run_to_rest()
    assert machine.board.count <= answer.value == machine.board.stop_point


def test_a_later_stop_point_lets_it_go_on_without_standing() -> None:
    machine = Machine().prepare().arm(stop=40_000).go()
    machine.run_until(lambda: machine.board.count > 38_000)
    machine.do(m.StopAt(*machine.consent, 60_000))
    start = len(machine.paces)
    machine.run_to_rest()
    assert machine.board.count == 60_000
    moving = machine.paces[start : machine.paces.index(0, start)]
    assert min(moving[:2000]) > 1000


def test_it_stands_at_the_end_of_the_queue_and_waits_for_the_operator() -> None:
    machine = Machine().prepare([(10_000, 50), (10_000, -50)]).arm().go()
    machine.run_to_rest()
    assert (machine.board.state, machine.board.cause) == (State.HELD, Cause.QUEUE_END)
    assert machine.board.count == 20_000
    machine.lay([(10_000, 50)])
    machine.run(3000)
    assert machine.board.count == 20_000
    machine.go().run_to_rest()
    assert machine.board.count == 30_000


def test_segments_that_come_in_time_are_driven_into_without_slowing_down() -> None:
    machine = Machine().prepare([(10_000, 50)] * 2).arm(pace=6000).go()
    machine.run_until(lambda: machine.board.spindle.v == 6000)
    for _ in range(4):
        machine.lay([(10_000, 50)])
        machine.run_until(lambda: machine.board.line.end - machine.board.count < 8000)
        assert machine.board.spindle.v == 6000


def test_segments_that_come_while_it_settles_do_not_start_it_again() -> None:
    machine = Machine().prepare([(10_000, 50)]).arm().go()
    machine.run_until(lambda: machine.outputs.rate == 0 and machine.board.count == 10_000)
    assert machine.board.state == State.TURNING
    machine.lay([(10_000, 50)])
    machine.run(5000)
    assert machine.board.count == 10_000
    assert (machine.board.state, machine.board.cause) == (State.HELD, Cause.QUEUE_END)


def test_the_hard_limit_holds_without_a_stop_point() -> None:
    machine = Machine().prepare(max_count=12_345).arm().go()
    machine.run_to_rest()
    assert (machine.board.count, machine.board.cause) == (12_345, Cause.MAX_COUNT)
    assert machine.refusal(m.Go(*machine.consent)) == (Refusal.RANGE, 12_345)
    assert machine.refusal(m.StopAt(*machine.consent, 12_346)) == (Refusal.RANGE, 12_345)


def test_pace_follows_what_is_asked_within_the_limit_of_setup() -> None:
    machine = Machine().winding(pace=6000)
    machine.do(m.Pace(*machine.consent, 1500))
    machine.run(3000)
    assert machine.outputs.rate == 1500
    assert machine.refusal(m.Pace(*machine.consent, 8001)) == (Refusal.RANGE, 8000)
    assert machine.refusal(m.Pace(*machine.consent, 0)) == (Refusal.RANGE, 1)
    machine.do(m.Pace(*machine.consent, 8000))
    machine.run(5000)
    assert machine.outputs.rate == 8000


def test_hold_is_obeyed_at_once_in_word_and_by_braking_in_deed() -> None:
    machine = Machine().winding()
    epoch = machine.board.epoch
    machine.say(m.Hold())
    machine.run()
    status = machine.statuses()[-1]
    assert (status.state, status.cause, status.epoch) == (State.HELD, Cause.HOLD, epoch + 1)
    assert not status.inputs & m.InputBit.STANDING
    assert machine.refusal(m.Go(*machine.consent)) == (Refusal.MOVING, 0)
    assert machine.refusal(m.Disarm()) == (Refusal.MOVING, 0)
    machine.run_to_rest()
    machine.run(50)
    assert machine.statuses()[-1].inputs & m.InputBit.STANDING
    assert machine.outputs.drive_enable == 1
    machine.go()


def test_held_and_gone_on_it_loses_nothing() -> None:
    machine = Machine().prepare([(400, 14), (400, -14)] * 50).arm(stop=30_000).go()
    for _ in range(6):
        machine.run(900)
        machine.say(m.Hold())
        machine.run()
        machine.run_to_rest()
        machine.go()
    machine.run_to_rest()
    assert machine.board.count == machine.position == 30_000
    assert machine.guide == machine.board.guide == 14


def test_a_belt_that_slips_a_little_is_made_up_for_at_the_end() -> None:
    machine = Machine()
    machine.losing = 5000  # a count in 5000, ten in all
    machine.prepare().arm(stop=50_000).go()
    machine.run_to_rest()
    assert machine.board.count == 50_000
    assert machine.step == 50_010


def test_without_a_pace_or_a_way_to_go_there_is_no_go() -> None:
    machine = Machine().prepare()
    machine.do(m.Arm(*machine.consent))
    assert machine.refusal(m.Go(*machine.consent)) == (Refusal.RANGE, 1)
    machine.do(m.Pace(*machine.consent, 1000))
    machine.do(m.StopAt(*machine.consent, 0))
    assert machine.refusal(m.Go(*machine.consent)) == (Refusal.RANGE, 0)
    machine.do(m.StopAt(*machine.consent, 0xFFFFFFFF))
    machine.go()


def test_a_stop_point_behind_a_standing_spindle_is_refused() -> None:
    machine = Machine().prepare().arm(stop=8000).go()
    machine.run_to_rest()
    assert machine.refusal(m.StopAt(*machine.consent, 7999)) == (Refusal.RANGE, 8000)


@pytest.mark.parametrize("rotation", [0, 1])
def test_the_way_round_is_told_to_the_port_and_counting_goes_up_either_way(rotation: int) -> None:
    machine = Machine().winding(rotation=rotation)
    assert machine.outputs.rotation == rotation
    assert machine.board.count > 0
