"""The contact's readings: what averaging leaves of hum and wobble, and what a reading says of itself."""

from __future__ import annotations

import math
from itertools import pairwise

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.machine.twin.ideal import COUNTER_ONLY, HAND_GUIDED, Machine
from windctl.machine.twin.contact_mean import ContactMean
from windctl.protocol import messages as m
from windctl.protocol.messages import Refusal


def first_reading(machine: Machine) -> m.Reading:
    machine.run_until(lambda: bool(machine.readings()), at_most=20_000)
    return machine.readings()[0]


def test_a_constant_is_read_in_sixteenths_of_a_unit() -> None:
    machine = Machine().prepare()
    machine.contact = lambda _: 4321
    machine.do(m.Measure(300, 0))
    reading = first_reading(machine)
    assert (reading.value, reading.window, reading.flags) == (4321 * 16, 300, 0)
    assert (reading.count, reading.celsius) == (0, 2150)


def test_one_reading_is_one_reading() -> None:
    machine = Machine().prepare()
    machine.do(m.Measure(100, 0))
    machine.run(5000)
    assert len(machine.readings()) == 1


@pytest.mark.parametrize("every", [200, 201, 777])
def test_readings_begin_at_the_interval_asked_for_but_share_no_sample(every: int) -> None:
    machine = Machine().prepare()
    machine.do(m.Measure(100, every))
    machine.run(8000)
    times = [reading.ticks for reading in machine.readings()]
    # 99 ticks fill the boxcar, 100 are averaged, the next one closes the reading
    assert {b - a for a, b in pairwise(times)} == {max(every, 200)}


@given(
    hz=st.sampled_from([50, 60, 100, 120]),
    phase=st.floats(0, 6.28),
    window=st.sampled_from([100, 200, 300]),
)
def test_mains_hum_leaves_nothing_but_rounding(hz: int, phase: float, window: int) -> None:
    mean = ContactMean()
    mean.start(window, 0, 0, 0, False)
    tick = 0
    done = False
    while not done:
        tick += 1
        hum = round(2000 * math.sin(2 * math.pi * hz * tick / 1000 + phase))
        done = mean.sample(30_000 + hum, tick, 0, False)
    assert abs(mean.value / 16 - 30_000) < 0.2


@pytest.mark.parametrize("rpm", [200, 333, 600, 1000])
def test_what_a_wobbling_axis_generates_leaves_nothing_over_whole_turns(rpm: int) -> None:
    machine = Machine().winding(pace=rpm * 400 // 60, fitted=HAND_GUIDED)
    hum_and_wobble = 1500.0

    def contact(tick: int) -> int:
        angle = 2 * math.pi * machine.position / 400
        return round(30_000 + hum_and_wobble * (math.sin(angle) + math.sin(2 * math.pi * tick / 20)))

    machine.contact = contact
    machine.do(m.Measure(100, 200))
    machine.run(6000)
    turn = 60_000 / rpm
    for reading in machine.readings():
        assert reading.flags == m.ReadingFlag.TURNING
        turns = reading.window / turn
        assert reading.window >= 100
        assert abs(turns - round(turns)) <= 1.01 / turn  # to the tick
        assert abs(reading.value / 16 - 30_000) < hum_and_wobble * 0.02


@settings(max_examples=25)
@given(st.lists(st.integers(0, 65534), min_size=260, max_size=260))
def test_a_reading_is_the_mean_of_a_sliding_mean(samples: list[int]) -> None:
    window = 100
    mean = ContactMean()
    mean.start(window, 0, 0, 0, False)
    for tick, sample in enumerate(samples):
        if mean.sample(sample, tick, 0, False):
            break
    boxes = [sum(samples[i : i + 100]) / 100 for i in range(window)]
    assert mean.value == pytest.approx(16 * sum(boxes) / window, abs=0.5001)


def test_a_turning_reading_belongs_to_the_count_at_its_middle() -> None:
    machine = Machine().winding(pace=4000)  # 4 counts a tick
    machine.do(m.Measure(300, 0))
    start = machine.board.count
    reading = first_reading(machine)
    assert reading.window == 300  # three turns of 100 ticks
    assert reading.count == pytest.approx((start + machine.board.count) / 2, abs=4)


def test_stopping_or_starting_begins_a_reading_anew() -> None:
    machine = Machine().prepare().arm(pace=4000)
    machine.do(m.Measure(1000, 0))
    machine.run(600)
    machine.go()
    machine.contact = lambda _: 2000
    reading = first_reading(machine)
    assert reading.flags & m.ReadingFlag.TURNING
    assert reading.value == 2000 * 16


def test_a_sample_at_the_end_of_the_scale_is_told() -> None:
    machine = Machine().prepare()
    machine.contact = lambda tick: 65535 if tick == 150 else 1000
    machine.do(m.Measure(100, 250))
    machine.run(1000)
    flags = [reading.flags for reading in machine.readings()]
    assert flags[0] == m.ReadingFlag.OPEN
    assert flags[1:] == [0] * len(flags[1:])


@pytest.mark.parametrize("window", [1, 99, 150, 6100])
def test_a_window_is_whole_tenths_of_a_second(window: int) -> None:
    machine = Machine().prepare()
    assert machine.refusal(m.Measure(window, 0)) == (Refusal.RANGE, 6000)


def test_window_zero_ends_the_readings() -> None:
    machine = Machine().prepare()
    machine.do(m.Measure(100, 200))
    machine.run(1000)
    machine.do(m.Measure(0, 0))
    n = len(machine.readings())
    machine.run(2000)
    assert len(machine.readings()) == n > 0


def test_a_board_without_a_contact_says_so() -> None:
    machine = Machine(capabilities=int(m.Capability.DRIVE_STEP))
    machine.greet()
    assert machine.refusal(m.Measure(100, 0)) == (Refusal.NOT_FITTED, 0)


def test_readings_go_on_over_a_greeting() -> None:
    machine = Machine().prepare(fitted=COUNTER_ONLY)
    machine.do(m.Measure(100, 200))
    machine.greet(nonce=2)
    machine.run(1000)
    assert len(machine.readings()) >= 4


def test_the_longest_sum_stays_within_sixty_four_bits() -> None:
    mean = ContactMean()
    mean.start(6000, 0, 0, 0, True)
    mean.counts_per_turn = 1
    for tick in range(1, 61_000):
        assert not mean.sample(65535, tick, 0, True)  # never a whole turn
        assert mean.sum <= 65535 * 100 * 60_000 < 2**64
        assert mean.window_ticks <= 60_000


def test_a_guide_on_its_way_does_not_make_a_reading_a_turning_one() -> None:
    machine = Machine().prepare().arm()
    machine.do(m.GuideTo(*machine.consent, 4000, 1000))
    machine.do(m.Measure(300, 0))
    reading = first_reading(machine)
    assert (reading.flags, reading.window) == (0, 300)
    assert machine.board.guide < 1000


def test_after_winding_a_reading_is_one_at_rest_again() -> None:
    machine = Machine().prepare().arm(stop=2000).go()
    machine.run_to_rest()
    machine.do(m.Measure(100, 0))
    assert first_reading(machine).flags == 0
