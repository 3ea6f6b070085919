"""A board without a drive: it counts, says when to stop, and never claims that it can."""

from __future__ import annotations

import pytest

from tests.machine.twin.ideal import COUNTER_ONLY, Machine
from windctl.protocol import messages as m
from windctl.protocol.messages import Cause, Refusal, State


def counter(**limits: int) -> Machine:
    return Machine(capabilities=COUNTER_ONLY).prepare(fitted=COUNTER_ONLY, **limits)


def crank(machine: Machine, counts: int) -> None:
    """Turn by hand, four counts a tick, forward or back."""
    for _ in range(abs(counts) // 4):
        machine.turn(4 if counts > 0 else -4)
        machine.run()


def going(stop: int | None = None, **limits: int) -> Machine:
    machine = counter(**limits)
    machine.do(m.Arm(*machine.consent))
    if stop is not None:
        machine.do(m.StopAt(*machine.consent, stop))
    return machine.go()


def test_it_needs_no_pace_and_moves_nothing() -> None:
    machine = going(stop=4000)
    crank(machine, 3000)
    assert machine.board.count == 3000
    assert (machine.outputs.rate, machine.outputs.drive_enable) == (0, 0)


def test_it_says_once_when_the_stop_point_is_reached_and_counts_what_comes_after() -> None:
    machine = going(stop=4000)
    crank(machine, 3996)
    assert machine.notices(m.NoticeKind.HAND_STOP_DUE) == []
    crank(machine, 404)
    [due] = machine.notices(m.NoticeKind.HAND_STOP_DUE)
    assert due.a == 4000
    assert machine.board.state == State.TURNING
    machine.run_to_rest()
    assert (machine.board.state, machine.board.cause) == (State.HELD, Cause.STOP_POINT)
    assert machine.board.count == 4400


def test_the_hard_limit_is_a_stop_too() -> None:
    machine = going(max_count=4000)
    crank(machine, 4000)
    machine.run_to_rest()
    assert machine.board.cause == Cause.MAX_COUNT


def test_a_pause_is_no_stop() -> None:
    machine = going(stop=4000)
    crank(machine, 2000)
    machine.run(5000)
    assert machine.board.state == State.TURNING
    crank(machine, 2000)
    machine.run_to_rest()
    assert machine.board.state == State.HELD


def test_a_stop_point_that_is_passed_already_is_due_at_once() -> None:
    machine = going()
    crank(machine, 2000)
    assert machine.do(m.StopAt(*machine.consent, 1500)).value == 2000
    machine.run()
    assert len(machine.notices(m.NoticeKind.HAND_STOP_DUE)) == 1


def test_counting_goes_on_in_every_state_both_ways() -> None:
    machine = counter()
    crank(machine, 400)
    crank(machine, -100)
    assert machine.board.count == 300
    assert machine.board.state == State.DRIVES_OFF


def test_a_hold_ends_the_winding_although_the_hand_may_go_on() -> None:
    machine = going(stop=4000)
    crank(machine, 1000)
    machine.say(m.Hold())
    crank(machine, 100)
    assert (machine.board.state, machine.board.count) == (State.HELD, 1100)
    assert machine.refusal(m.Go(*machine.consent)) == (Refusal.MOVING, 0)
    machine.run_to_rest()
    machine.go()


def test_speed_is_the_measured_one() -> None:
    machine = going()
    crank(machine, 2000)
    assert machine.statuses()[-1].speed == 4000


@pytest.mark.parametrize(("counts_per_turn", "ticks"), [(1, 2000), (4, 500), (400, 50)])
def test_a_coarse_counter_stands_when_counts_stay_away_for_long_enough(
    counts_per_turn: int, ticks: int
) -> None:
    machine = going(counts_per_turn=counts_per_turn)
    machine.turn(1)
    machine.run()
    machine.run(ticks - 1)
    assert not machine.board.standing
    machine.run()
    assert machine.board.standing
