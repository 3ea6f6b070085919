"""Plays written by hand: into the corners of the board that random ticks seldom reach."""

from __future__ import annotations

from typing import Any

from tests.firmware.trace import RecordedBoard, Trace
from tests.machine.twin.ideal import COUNTER_ONLY, HAND_GUIDED, LIMITS, Machine
from windctl.machine.twin.board import EVERYTHING
from windctl.machine.twin.signals import ALL_OK, GUARD_OK, PEDAL_DOWN, STOP_OK
from windctl.protocol import messages as m
from windctl.protocol.messages import Capability, Cause, Refusal, State, Trip

SLOW = {"max_pace": 1000, "accel": 65_535, "decel": 100}


def machine_on(trace: Trace, **board: Any) -> Machine:
    """A machine without flaws whose board writes down what passes."""
    machine = Machine()
    machine.board = RecordedBoard(trace, **board)
    return machine


def refusals(trace: Trace) -> None:
    """What is refused for want of something."""
    machine = machine_on(trace, capabilities=EVERYTHING)
    machine.ask(m.Setup(**LIMITS))  # not greeted
    machine.greet()
    machine.ask(m.Arm(*machine.consent))  # no Setup
    machine.ask(m.SetDatum(*machine.consent, 1, 0, 0, 0, 0))
    machine.do(m.Setup(**LIMITS | {"fitted": HAND_GUIDED | int(Capability.PEDAL)}))
    machine.pins = ALL_OK & ~STOP_OK
    machine.ask(m.Arm(*machine.consent))  # input open
    machine.pins = ALL_OK
    machine.do(m.Arm(*machine.consent))
    machine.ask(m.Go(*machine.consent))  # no datum
    machine.do(m.SetDatum(*machine.consent, 1, 0, 0, 0, 0))
    machine.ask(m.Go(*machine.consent))  # pedal up
    machine.pins |= PEDAL_DOWN
    machine.ask(m.Go(*machine.consent))  # pressed, but not for long
    machine.run(30)
    machine.ask(m.Go(*machine.consent))  # no pace
    machine.do(m.Pace(*machine.consent, 500))
    machine.do(m.StopAt(*machine.consent, 0))
    machine.ask(m.Go(*machine.consent))  # nowhere to go
    machine.do(m.StopAt(*machine.consent, 4000))
    machine.do(m.Go(*machine.consent))
    machine.run(300)
    machine.pins &= ~PEDAL_DOWN
    machine.run_to_rest()
    assert machine.board.cause == Cause.PEDAL
    for count in (-(1 << 30) - 1, (1 << 30) + 1):
        machine.ask(m.SetDatum(*machine.consent, 1, count, 0, 0, 0))
    machine = machine_on(trace, capabilities=0)
    machine.greet()
    machine.ask(m.Measure(100, 0))  # no contact
    machine.ask(m.Setup(**LIMITS))  # nothing fitted


def ranges(trace: Trace) -> None:
    """A Setup beyond each of its bounds, and one that is there already."""
    machine = machine_on(trace)
    machine.greet()
    for beyond in (
        {"counts_per_turn": 0}, {"counts_per_turn": 401}, {"steps_per_turn": 0}, {"steps_per_turn": 801},
        {"max_count": 0}, {"max_count": (1 << 30) + 1}, {"max_count": 0xFFFFFFFF}, {"max_pace": 0},
        {"max_pace": 15_001}, {"accel": 99}, {"decel": 99}, {"decel": 799}, {"guide_max": -4001},
        {"guide_min": 4001}, {"tension_low": 200, "tension_high": 199}, {"rotation": 2},
    ):  # fmt: skip
        assert machine.refusal(m.Setup(**LIMITS | beyond))[0] == Refusal.RANGE
    bounds = {
        "counts_per_turn": 400, "steps_per_turn": 800, "max_count": 1 << 30, "max_pace": 15_000,
        "decel": 1500, "accel": 100, "guide_min": -0x80000000, "guide_max": -0x80000000,
        "tension_low": 65_535, "rotation": 1,
    }  # fmt: skip
    machine.do(m.Setup(**LIMITS | bounds))
    machine.do(m.Setup(**LIMITS | bounds))
    machine.do(m.SetDatum(*machine.consent, 1, 0, -0x80000000, 0, 0))


def late_frames(trace: Trace) -> None:
    """What was sent before a greeting and arrives after it, under the very number of the greeting."""
    machine = machine_on(trace)
    machine.greet(nonce=1)
    frame = machine.say(m.Setup(**LIMITS))
    machine.run()
    machine.wire(frame)
    machine.run()
    machine.sequence -= 1
    machine.greet(nonce=2)
    machine.wire(frame)
    machine.run()
    answers = [h for h in machine.heard if isinstance(h, m.Accepted | m.Refused)]
    assert [type(answer) for answer in answers] == [m.Accepted, m.Accepted, m.Refused]


def lost_index(trace: Trace) -> None:
    """An index that stays away, and one that comes elsewhere."""
    machine = machine_on(trace).winding()
    machine.index = False
    machine.run_to_rest()
    assert machine.board.trip == Trip.INDEX
    machine.do(m.ClearTrip(*machine.consent))
    machine.arm()
    assert machine.refusal(m.Go(*machine.consent)) == (Refusal.NO_DATUM, m.Trust.GUIDE)
    machine = machine_on(trace).winding()
    machine.turn(60)
    machine.run(100)
    machine.run_to_rest()
    assert machine.board.state == State.TRIPPED


def second_lock(trace: Trace) -> None:
    """Go looks at the inputs itself, though no board comes to be ready with one open unless it is broken."""
    machine = machine_on(trace).prepare()
    machine.pins = ALL_OK & ~STOP_OK
    machine.run()
    machine.board.set_state(State.READY)
    assert machine.refusal(m.Go(*machine.consent)) == (Refusal.INPUT_OPEN, machine.pins)
    machine.board.set_state(99)
    machine.run(70)
    assert machine.board.trip == Trip.INTERNAL


def inputs(trace: Trace) -> None:
    """Inputs that open at rest, under way, and where they forbid what is asked."""
    for pins, trip in ((ALL_OK & ~STOP_OK, Trip.STOP_INPUT), (ALL_OK & ~GUARD_OK, Trip.GUARD)):
        machine = machine_on(trace).winding(pace=3000)
        machine.pins = pins
        machine.run_to_rest()
        assert machine.board.trip == trip
        machine.ask(m.ClearTrip(*machine.consent))  # input open
        machine.pins = ALL_OK
        machine.run()
        machine.do(m.ClearTrip(*machine.consent))
    for tension, trip in ((900, Trip.TENSION_LOW), (2100, Trip.TENSION_HIGH)):
        machine = machine_on(trace).prepare(tension_low=1000, tension_high=2000).arm().go()
        machine.tension = tension
        machine.run_to_rest()
        assert machine.board.trip == trip
    machine = machine_on(trace).prepare()
    machine.pins = ALL_OK & ~GUARD_OK
    machine.run()
    machine.ask(m.Arm(*machine.consent))
    machine.pins = ALL_OK
    machine.run()
    machine.do(m.Arm(*machine.consent))
    machine.do(m.GuideTo(*machine.consent, 40, 4000))
    machine.run_to_rest()
    machine.do(m.Pace(*machine.consent, 100))
    machine.ask(m.Go(*machine.consent))  # away from its line
    machine.beats = False
    machine.do(m.GuideTo(*machine.consent, 4000, 1))
    machine.run(2100)  # silence
    assert machine.board.cause == Cause.SILENCE


def pedal(trace: Trace) -> None:
    """Let go, and pressed again while it still brakes."""
    machine = machine_on(trace).prepare(fitted=HAND_GUIDED | int(Capability.PEDAL), decel=1000)
    machine.arm(pace=3000)
    machine.pins |= PEDAL_DOWN
    machine.run(30)
    machine.go()
    machine.run(800)
    machine.pins &= ~PEDAL_DOWN
    machine.run(10)
    machine.pins |= PEDAL_DOWN
    machine.run(10)
    machine.pins &= ~PEDAL_DOWN  # bounces
    machine.run()
    machine.pins |= PEDAL_DOWN
    machine.run(30)
    assert machine.board.pedal_fresh
    assert not machine.board.standing
    machine.run_to_rest()


def by_hand(trace: Trace) -> None:
    """A machine that only counts, to its stop point and to its limit."""
    for stop in (1200, None):
        machine = machine_on(trace).prepare(fitted=COUNTER_ONLY, max_count=2000)
        machine.do(m.Arm(*machine.consent))
        if stop is not None:
            machine.do(m.StopAt(*machine.consent, stop))
        machine.go()
        for _ in range(200):
            machine.turn(11)
            machine.run()
        machine.do(m.StopAt(*machine.consent, 5))  # passed already
        machine.run_to_rest()
        assert machine.board.state == State.HELD


def ends(trace: Trace) -> None:
    """All three ways to arrive, a creep after a slip, and stop points within the braking distance."""
    machine = machine_on(trace).prepare([(400, 14)] * 3).arm(pace=3000).go()
    machine.run_to_rest()
    assert machine.board.cause == Cause.QUEUE_END
    machine = machine_on(trace).winding(pace=3000, max_count=8000, fitted=HAND_GUIDED)
    machine.run_to_rest()
    assert machine.board.cause == Cause.MAX_COUNT
    for stop in (0, 4000, 5000, 7990):
        machine = machine_on(trace).winding(pace=3000, max_count=8000, fitted=HAND_GUIDED)
        machine.losing = 500
        machine.do(m.StopAt(*machine.consent, stop))
        machine.run_to_rest()
        assert machine.board.state == State.HELD


def ages(trace: Trace) -> None:
    """Turns and revolutions too slow to be waited for."""
    machine = machine_on(trace).prepare(
        fitted=HAND_GUIDED | Capability.TENSION, steps_per_turn=70, counts_per_turn=7
    )
    machine.arm(pace=1, stop=100)
    machine.do(m.Measure(100, 0))
    machine.go()
    machine.do(m.Measure(100, 0))
    machine.tension = 65_535
    machine.run(145_000)


def absurd(trace: Trace) -> None:
    """Counts that no machine could make, while it brakes for as long as a Setup allows."""
    for sign in (-1, 1):
        machine = machine_on(trace).winding(
            pace=1000, fitted=HAND_GUIDED, max_count=1 << 30, steps_per_turn=800, **SLOW
        )
        for _ in range(700):
            machine.turn(2000 * sign)
            machine.run()
        machine.run_to_rest()


SHORT = (refusals, ranges, late_frames, lost_index, second_lock, inputs, pedal, by_hand, ends, absurd)
LENGTHY = (ages,)
