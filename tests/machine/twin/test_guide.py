"""Where the guide goes: exactly along the formula of the specification, by counts and never by time."""

from __future__ import annotations

import json
from itertools import pairwise
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.machine.twin.ideal import COUNTER_ONLY, HAND_GUIDED, PROGRAM, Machine, pack
from windctl.machine.twin.guide_line import GuideLine
from windctl.protocol import messages as m
from windctl.protocol.messages import Refusal, State, Trip

VECTORS = json.loads(
    (Path(__file__).parents[3] / "firmware_protocol" / "vectors.json").read_text(encoding="utf-8")
)


def position(segments: list[tuple[int, int]], count: int) -> int:
    """The formula, segment by segment: sign(G) * floor((k*|G| + N//2) / N) after k of N counts."""
    at = 0
    for n, g in segments:
        k = min(count, n)
        sign = 1 if g >= 0 else -1
        at += sign * ((k * abs(g) + n // 2) // n)
        count -= k
    return at


@st.composite
def segments(draw: st.DrawFn, longest: int = 65535) -> tuple[int, int]:
    n = draw(st.integers(1, longest))
    g = draw(st.integers(-min(n, 32767), min(n, 32767)))
    return n, g


@given(st.lists(segments(), min_size=1, max_size=8), st.lists(st.integers(0, 40), min_size=1, max_size=400))
def test_following_is_the_formula_for_any_segments_and_any_steps_of_counting(
    laid: list[tuple[int, int]], counted: list[int]
) -> None:
    line = GuideLine(8)
    line.append(len(laid), pack(laid))
    total = sum(n for n, _ in laid)
    at = count = 0
    for step in counted:
        step = min(step * 97, total - count)
        at += line.follow(step)
        count += step
        assert at == position(laid, count)


@given(st.lists(segments(300), min_size=1, max_size=6), st.data())
def test_entering_a_segment_midway_goes_on_as_if_it_had_been_followed_from_its_start(
    laid: list[tuple[int, int]], data: st.DataObject
) -> None:
    place = data.draw(st.integers(0, len(laid) - 1))
    into = data.draw(st.integers(0, laid[place][0] - 1))
    before = sum(n for n, _ in laid[:place]) + into
    line = GuideLine(8)
    line.datum(PROGRAM, before, place, into)
    line.append(len(laid) - place, pack(laid[place:]))
    assert line.end == sum(n for n, _ in laid)
    at = position(laid, before)
    for count in range(before + 1, line.end + 1):
        at += line.follow(1)
        assert at == position(laid, count)
    assert (line.executing, line.next) == (len(laid), len(laid))


@pytest.mark.parametrize("vector", VECTORS["guide_line"], ids=lambda v: f"{v['counts']}:{v['steps']}")
def test_the_worked_vectors_are_followed(vector: dict[str, list[int]]) -> None:
    line = GuideLine(4)
    line.append(1, pack([(vector["counts"], vector["steps"])]))
    at, positions = 0, [0]
    for _ in range(vector["counts"]):
        at += line.follow(1)
        positions.append(at)
    assert positions == vector["positions"]


@given(st.lists(st.integers(-60, 90), min_size=1, max_size=120))
def test_the_guide_follows_the_high_water_count_and_nothing_takes_a_step_back(counted: list[int]) -> None:
    laid = [(97, 31), (400, -200), (65535, 9000)]
    line = GuideLine(4)
    line.append(3, pack(laid))
    at = count = high = 0
    for step in counted:
        count += step
        high = max(high, count)
        at += line.follow(step)
        assert at == position(laid, high)


def test_a_whole_lay_is_wound_along_its_line_at_full_speed() -> None:
    laid = [(400, 14 if i // 40 % 2 == 0 else -14) for i in range(100)]
    machine = Machine().prepare(laid).arm(pace=8000).go()
    high = 0
    while machine.board.state == State.TURNING:
        machine.run()
        high = max(high, machine.board.count)
        assert machine.guide == position(laid, high)
    assert high == 40_000


def test_segments_stream_through_a_queue_of_eight() -> None:
    laid = [(100 + i % 7, (-1) ** i * (i % 50)) for i in range(300)]
    machine = Machine(queue=8).prepare(laid[:8]).arm(pace=8000).go()
    while machine.board.state == State.TURNING and machine.board.count < 25_000:
        line = machine.board.line
        n = min(line.free, 3, len(laid) - line.next)
        if n:
            machine.do(m.Lay(PROGRAM, line.next, n, pack(laid[line.next : line.next + n]).ljust(48, b"\0")))
        machine.run(3)
        assert machine.guide == position(laid, machine.board.count)
    assert machine.board.line.executing > 200


# ---------------------------------------------------------------- Lay


def lay(first: int, segments: list[tuple[int, int]], program: int = PROGRAM, n: int | None = None) -> m.Lay:
    return m.Lay(program, first, len(segments) if n is None else n, pack(segments).ljust(48, b"\0"))


def test_lay_is_all_or_nothing() -> None:
    machine = Machine(queue=8).prepare([(100, 5)] * 4)
    line = machine.board.line
    before = (line.next, line.end, line.crc)
    assert machine.refusal(lay(3, [(100, 5)])) == (Refusal.GAP, 4)
    assert machine.refusal(lay(5, [(100, 5)])) == (Refusal.GAP, 4)
    assert machine.refusal(lay(4, [(100, 5)] * 5)) == (Refusal.QUEUE_FULL, 4)
    assert machine.refusal(lay(4, [(100, 5), (0, 0)])) == (Refusal.SEGMENT, 1)
    assert machine.refusal(lay(4, [(100, 5), (100, 100), (5, -6)])) == (Refusal.SEGMENT, 2)
    assert machine.refusal(lay(4, [(100, 5)], program=PROGRAM + 1)) == (Refusal.PROGRAM, 0)
    assert machine.refusal(lay(4, [(100, 5)], n=0)) == (Refusal.RANGE, 12)
    assert machine.refusal(lay(4, [(100, 5)], n=13)) == (Refusal.RANGE, 12)
    assert (line.next, line.end, line.crc) == before
    machine.do(lay(4, [(100, 5)] * 4))


def test_the_running_crc_is_that_of_all_segments_since_the_datum() -> None:
    from binascii import crc_hqx

    laid = [(100 + i, i) for i in range(30)]
    machine = Machine().prepare(laid)
    machine.run(60)
    assert machine.statuses()[-1].program_crc == crc_hqx(pack(laid), 0xFFFF)


def test_a_datum_empties_the_queue_and_its_first_segment_must_be_longer_than_into() -> None:
    machine = Machine().prepare([(100, 5)] * 4)
    machine.do(m.SetDatum(*machine.consent, PROGRAM, 130, 7, 1, 30))
    line = machine.board.line
    assert (line.base, line.next, line.executing, line.end) == (1, 1, 1, 130)
    assert machine.refusal(lay(1, [(30, 5)])) == (Refusal.SEGMENT, 0)
    machine.do(lay(1, [(100, 5)]))
    assert line.end == 200


def test_the_queue_cannot_end_where_counts_end() -> None:
    machine = Machine().prepare()
    machine.do(m.SetDatum(*machine.consent, PROGRAM, 2**30 - 99, 0, 0, 0))
    assert machine.refusal(lay(0, [(100, 0)])) == (Refusal.RANGE, 2**30)
    machine.do(lay(0, [(99, 0)]))


@pytest.mark.parametrize("fitted", [HAND_GUIDED, COUNTER_ONLY])
def test_without_a_guide_there_is_no_queue_and_nothing_ends_with_it(fitted: int) -> None:
    machine = Machine().prepare(fitted=fitted)
    assert machine.refusal(lay(0, [(100, 5)])) == (Refusal.NOT_FITTED, 0)
    machine.arm(stop=8000).go()
    if fitted:
        machine.run_to_rest()
        assert machine.board.count == 8000
    assert machine.outputs.guide_enable == 0


# ---------------------------------------------------------------- at rest


def test_turning_forward_by_hand_without_power_is_caught_up_with_at_a_step_a_tick() -> None:
    laid = [(400, 100)] * 10
    machine = Machine().prepare(laid)
    for _ in range(100):
        machine.turn(8)
        machine.run()
    assert (machine.board.count, machine.guide) == (800, 0)
    machine.run_to_rest()
    machine.do(m.Arm(*machine.consent))
    before = machine.guide
    while not machine.board.standing or machine.board.line.lagging:
        machine.run()
        assert 0 <= machine.guide - before <= 1
        before = machine.guide
    assert machine.guide == position(laid, 800)


def test_what_was_turned_back_before_arming_does_not_confuse_what_is_caught_up_with() -> None:
    laid = [(400, 100)] * 10
    machine = Machine().prepare(laid)
    for counts in (8,) * 150 + (-8,) * 60:  # to 1200 and back to 720, without power
        machine.turn(counts)
        machine.run()
    machine.run_to_rest()
    machine.arm()
    machine.run_to_rest()
    assert machine.guide == position(laid, 1200)
    machine.go().run_to_rest()
    assert (machine.board.count, machine.guide) == (4000, 1000)


def test_unwinding_by_hand_is_counted_and_leaves_the_guide_where_it_is() -> None:
    machine = Machine().prepare([(400, 100)] * 50).arm(stop=8000).go()
    machine.run_to_rest()
    machine.do(m.Disarm())
    for _ in range(200):
        machine.turn(-4)
        machine.run()
    machine.run_to_rest()
    assert (machine.board.count, machine.guide) == (7200, 2000)
    machine.arm(stop=9000).go().run_to_rest()
    assert (machine.board.count, machine.guide) == (9000, 2250)


def test_guide_to_moves_at_its_pace_and_only_there() -> None:
    machine = Machine().prepare().arm()
    machine.do(m.GuideTo(*machine.consent, -250, 500))
    machine.run(400)
    assert -202 <= machine.guide <= -199
    assert not machine.board.standing
    assert machine.refusal(m.Go(*machine.consent)) == (Refusal.MOVING, 0)
    machine.run_to_rest()
    assert machine.guide == machine.board.guide == -250
    assert machine.refusal(m.Go(*machine.consent)) == (Refusal.RANGE, 0)  # it belongs at 0
    machine.do(m.GuideTo(*machine.consent, 0, 4000))
    machine.run_to_rest()
    machine.go()


def test_guide_to_keeps_the_limits() -> None:
    machine = Machine().prepare().arm()
    assert machine.refusal(m.GuideTo(*machine.consent, 4001, 500)) == (Refusal.RANGE, 4000)
    assert machine.refusal(m.GuideTo(*machine.consent, -4001, 500)) == (Refusal.RANGE, -4000)
    assert machine.refusal(m.GuideTo(*machine.consent, 0, 0)) == (Refusal.RANGE, 1)
    assert machine.refusal(m.GuideTo(*machine.consent, 0, 4001)) == (Refusal.RANGE, 4000)


def test_a_hold_stops_the_guide_where_it_is() -> None:
    machine = Machine().prepare().arm()
    machine.do(m.GuideTo(*machine.consent, 4000, 1000))
    machine.run(99)
    machine.say(m.Hold())
    machine.run(200)
    assert machine.guide == 100
    assert machine.board.state == State.READY


def test_a_step_beyond_the_limits_is_not_made() -> None:
    machine = Machine().prepare([(4000, 400)] * 3, guide_max=1000).arm().go()
    machine.run_until(lambda: machine.board.state == State.TRIPPED)
    machine.run_to_rest()
    assert machine.board.trip == Trip.GUIDE_LIMIT
    assert machine.guide == machine.board.guide == 1000
    assert machine.board.trust == m.Trust.COUNT


def test_what_is_pending_is_never_made_up_for_in_one_leap() -> None:
    laid = [(400, 100)] * 2
    machine = Machine().prepare(laid)
    for counts in (8,) * 400 + (-8,) * 350:  # by hand past the end of the queue, and back before it
        machine.turn(counts)
        machine.run()
    machine.run_to_rest()
    machine.arm(pace=2000)
    machine.run_to_rest()
    machine.go()
    machine.lay([(400, 100)] * 12)
    machine.run_to_rest()
    leaps = [abs(b - a) for a, b in pairwise(machine.positions)]
    assert machine.guide == position([(400, 100)] * 14, 5600) == 1400
    assert max(leaps) <= 5  # 16 counts of a line of a step in four, and those just made
