"""What stops the board by itself: each trip's cause, how it stops, what is trusted then, what clears it."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from tests.machine.twin.ideal import COUNTER_ONLY, Machine, pack
from windctl.protocol import messages as m
from windctl.protocol.messages import TRIPS, Refusal, State, Trip


def open_stop(machine: Machine) -> None:
    machine.pins &= ~m.InputBit.STOP_OK


def open_guard(machine: Machine) -> None:
    machine.pins &= ~m.InputBit.GUARD_OK


def run_too_fast(machine: Machine) -> None:
    machine.hurry = 160  # 6667 steps/s asked for; a quarter more than 8000 is the limit


def let_the_belt_slip(machine: Machine) -> None:
    machine.losing = 3


def lose_the_index(machine: Machine) -> None:
    machine.index = False


def go_back(machine: Machine) -> None:
    machine.turn(-41 - 10)


def break_the_wire(machine: Machine) -> None:
    machine.tension = 0


def catch_the_wire(machine: Machine) -> None:
    machine.tension = 9000


def open_a_limit_switch(machine: Machine) -> None:
    machine.pins &= ~m.InputBit.GUIDE_HIGH_OK


def corrupt_the_state(machine: Machine) -> None:
    machine.board.state = 9


CAUSES: dict[Trip, Callable[[Machine], None]] = {
    Trip.STOP_INPUT: open_stop,
    Trip.GUARD: open_guard,
    Trip.OVERSPEED: run_too_fast,
    Trip.SLIP: let_the_belt_slip,
    Trip.INDEX: lose_the_index,
    Trip.REVERSE: go_back,
    Trip.TENSION_LOW: break_the_wire,
    Trip.TENSION_HIGH: catch_the_wire,
    Trip.GUIDE_LIMIT: open_a_limit_switch,
    Trip.INTERNAL: corrupt_the_state,
}


def winding() -> Machine:
    machine = Machine()
    machine.tension = 3000
    limits = {"slip_counts": 100} | {"tension_low": 1000, "tension_high": 5000}
    return machine.winding(**limits)


@pytest.mark.parametrize("trip", CAUSES, ids=lambda trip: trip.name.lower())
def test_each_trip_stops_the_way_its_table_says_and_latches(trip: Trip) -> None:
    machine = winding()
    epoch = machine.board.epoch
    start = len(machine.paces)
    CAUSES[trip](machine)
    machine.run_until(lambda: machine.board.state == State.TRIPPED, at_most=1500)
    board, rule = machine.board, TRIPS[trip]
    assert board.trip == trip
    assert board.epoch == epoch + 1
    [notice] = machine.notices(m.NoticeKind.TRIPPED)
    assert (notice.a, notice.b) == (trip, board.count)
    assert machine.statuses()[-1].trip == trip
    assert board.trust == (m.Trust.COUNT if rule.count else 0) | (m.Trust.GUIDE if rule.guide else 0)
    if rule.category == 0:
        assert (machine.outputs.rate, machine.outputs.drive_enable, machine.outputs.guide_enable) == (0, 0, 0)
    else:
        assert machine.outputs.rate > 0
        assert machine.outputs.drive_enable == 1
        machine.run_until(lambda: machine.outputs.drive_enable == 0)
        assert machine.outputs.rate == 0
        last = max(i for i, pace in enumerate(machine.paces) if pace)
        assert len(machine.paces) - 1 - last == 51  # off 50 ticks after the last step's tick
        braking = [pace for pace in machine.paces[start:] if pace]
        assert all(0 <= a - b <= 4 for a, b in zip(braking[-1000:], braking[-999:], strict=False))
    machine.run(3000)
    assert board.state == State.TRIPPED
    assert machine.outputs.rate == 0


@pytest.mark.parametrize(
    ("cause", "heal"),
    [
        (open_stop, m.InputBit.STOP_OK),
        (open_guard, m.InputBit.GUARD_OK),
        (open_a_limit_switch, m.InputBit.GUIDE_HIGH_OK),
    ],
)
def test_an_input_has_to_close_before_its_trip_is_cleared_and_before_arming(
    cause: Callable[[Machine], None], heal: int
) -> None:
    machine = winding()
    cause(machine)
    machine.run(3000)
    assert machine.refusal(m.ClearTrip(*machine.consent)) == (Refusal.INPUT_OPEN, machine.pins)
    machine.pins |= heal
    machine.run()
    machine.do(m.ClearTrip(*machine.consent))
    assert (machine.board.state, machine.board.trip) == (State.DRIVES_OFF, Trip.NONE)
    cause(machine)
    machine.run()
    assert machine.board.state == State.DRIVES_OFF  # without power there is nothing to stop
    assert machine.refusal(m.Arm(*machine.consent)) == (Refusal.INPUT_OPEN, machine.pins)


@pytest.mark.parametrize("state", ["ready", "held"])
def test_an_open_guard_takes_the_power_from_a_standing_spindle(state: str) -> None:
    machine = Machine().prepare().arm(stop=400)
    if state == "held":
        machine.go().run_to_rest()
    open_guard(machine)
    machine.run()
    assert (machine.board.state, machine.board.trip) == (State.TRIPPED, Trip.GUARD)
    assert machine.outputs.drive_enable == 0


def test_removed_power_overrides_a_trip_that_is_still_braking() -> None:
    machine = winding()
    open_guard(machine)
    machine.run(10)
    assert machine.outputs.drive_enable == 1
    open_stop(machine)
    machine.run()
    assert machine.board.trip == Trip.STOP_INPUT
    assert (machine.outputs.rate, machine.outputs.drive_enable) == (0, 0)


def test_a_second_trip_does_not_hide_the_first() -> None:
    machine = winding()
    open_guard(machine)
    machine.run(10)
    open_a_limit_switch(machine)
    machine.run(10)
    assert machine.board.trip == Trip.GUARD
    assert len(machine.notices(m.NoticeKind.TRIPPED)) == 1


def test_a_trip_cannot_be_cleared_while_the_spindle_moves() -> None:
    machine = winding()
    open_guard(machine)
    machine.run(10)
    machine.pins |= m.InputBit.GUARD_OK
    assert machine.refusal(m.ClearTrip(*machine.consent)) == (Refusal.MOVING, 0)


def test_after_a_trip_that_cost_the_count_a_datum_is_needed() -> None:
    machine = winding()
    lose_the_index(machine)
    machine.run(3000)
    machine.index = True
    machine.do(m.ClearTrip(*machine.consent))
    machine.do(m.Arm(*machine.consent))
    machine.do(m.Pace(*machine.consent, 6000))
    assert machine.refusal(m.Go(*machine.consent)) == (Refusal.NO_DATUM, m.Trust.GUIDE)
    board = machine.board
    machine.do(m.SetDatum(*machine.consent, 1, board.count, board.guide, 0, 0))
    assert board.trust == m.Trust.COUNT | m.Trust.GUIDE


def test_the_guide_follows_to_the_end_of_the_braking_of_a_trip() -> None:
    machine = winding()
    open_guard(machine)
    machine.run(3000)
    assert machine.guide == (machine.board.count * 300 + 30_000) // 60_000


def test_slip_within_the_allowance_is_no_trip() -> None:
    machine = Machine()
    machine.losing = 5000
    machine.index = False
    machine.prepare(slip_counts=20, fitted=3).arm(stop=90_000).go()
    machine.run_to_rest()
    assert machine.board.trip == Trip.NONE
    machine.losing = 1000
    machine.do(m.StopAt(*machine.consent, 180_000))
    machine.go().run_to_rest()
    assert machine.board.trip == Trip.SLIP


def test_an_index_at_the_wrong_place_trips_within_a_turn() -> None:
    machine = Machine().prepare(slip_counts=20, reverse_counts=100).arm().go()
    machine.run_until(lambda: machine.board.count > 2000)
    assert machine.board.trip == Trip.NONE
    machine.turned_so_far -= 60  # the encoder loses counts that the index does not
    machine.position -= 60
    start = machine.board.count
    machine.run_until(lambda: machine.board.state == State.TRIPPED)
    assert machine.board.trip in (Trip.INDEX, Trip.SLIP)
    assert machine.board.count - start <= 600


def test_tension_is_the_mean_of_a_whole_turn_and_one_bad_moment_is_no_trip() -> None:
    machine = winding()
    machine.tension = 0
    machine.run(10)  # of 60 ticks a turn
    machine.tension = 3000
    machine.run(300)
    assert machine.board.state == State.TURNING
    assert machine.board.turns.tension == 3000
    machine.tension = 999
    machine.run(125)
    assert machine.board.trip == Trip.TENSION_LOW


def test_the_bounds_of_tension_may_be_left_out() -> None:
    machine = Machine().winding()
    machine.tension = 65535
    machine.run(500)
    machine.tension = 0
    machine.run(500)
    assert machine.board.state == State.TURNING


def test_a_little_way_back_is_allowed_and_made_good_by_going_forward() -> None:
    machine = Machine().prepare(reverse_counts=40, slip_counts=400, fitted=3).arm(pace=1000).go()
    machine.run(1000)
    for _ in range(5):
        machine.turn(-30)
        machine.run(200)
    assert machine.board.state == State.TURNING
    machine.turn(-50)
    machine.run()
    assert machine.board.trip == Trip.REVERSE


def test_stop_and_guard_inputs_work_before_any_setup_and_on_a_counter() -> None:
    machine = Machine().winding(fitted=COUNTER_ONLY)
    open_guard(machine)
    machine.run()
    assert machine.board.trip == Trip.GUARD
    fresh = Machine()
    open_stop(fresh)
    fresh.run(60)
    assert not fresh.statuses()[-1].inputs & m.InputBit.STOP_OK


def test_the_way_back_is_counted_anew_from_each_go() -> None:
    machine = Machine().prepare(reverse_counts=40, slip_counts=400, fitted=3).arm(pace=1000)
    for _ in range(3):
        machine.go()
        machine.turn(-30)
        machine.run()
        machine.say(m.Hold())
        machine.run()
        machine.run_to_rest()
    assert machine.board.trip == Trip.NONE
    assert machine.board.count < -80


def test_after_a_guide_limit_the_guide_stays_where_it_is() -> None:
    machine = winding()
    open_a_limit_switch(machine)
    machine.run()
    guide = machine.guide
    machine.run(3000)
    assert machine.guide == guide
    assert machine.board.line.pending > 0


def test_a_datum_lets_the_index_find_its_place_anew() -> None:
    machine = Machine().prepare(slip_counts=20).arm(stop=2000).go()
    machine.run_to_rest()
    machine.do(m.Disarm())
    machine.turned_so_far -= 60  # while nobody looks, the encoder loses counts
    machine.position -= 60
    machine.do(m.SetDatum(*machine.consent, 1, 2000, machine.board.guide, 0, 0))
    machine.do(m.Lay(1, 0, 1, pack([(60_000, 0)]).ljust(48, b"\0")))
    machine.arm().go()
    machine.run(3000)
    assert machine.board.trip == Trip.NONE


def test_the_turn_in_which_winding_begins_is_not_judged_by_its_tension() -> None:
    machine = Machine()
    machine.tension = 3000
    machine.prepare(tension_low=1000).arm(stop=600).go()
    machine.run_to_rest()
    machine.do(m.StopAt(*machine.consent, 100_000))
    machine.tension = 0
    machine.go()
    machine.run_until(lambda: machine.board.count > 760)
    machine.tension = 3000
    machine.run(3000)
    assert machine.board.state == State.TURNING
