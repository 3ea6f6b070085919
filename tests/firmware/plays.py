"""Plays written by hand: into the corners of the board that random ticks seldom reach."""

from __future__ import annotations

from typing import Any

from tests.firmware.trace import RecordedBoard, Trace
from tests.machine.ideal import COUNTER_ONLY, HAND_GUIDED, LIMITS, Machine
from windctl.machine.virtual.board import EVERYTHING
from windctl.machine.virtual.signals import ALL_OK, GUARD_OK, PEDAL_DOWN, STOP_OK
from windctl.protocol import messages as m
from windctl.protocol.messages import Capability, Cause, State, Trip

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
    machine = machine_on(trace).winding(max_count=8000, fitted=HAND_GUIDED)
    machine.run_to_rest()
    assert machine.board.cause == Cause.MAX_COUNT
    for stop in (0, 4000, 4500, 7990):
        machine = machine_on(trace).winding(max_count=8000, fitted=HAND_GUIDED)
        machine.losing = 500
        machine.do(m.StopAt(*machine.consent, stop))
        machine.run_to_rest()
        assert machine.board.state == State.HELD


def ages(trace: Trace) -> None:
    """Turns and revolutions too slow to be waited for."""
    machine = machine_on(trace).prepare(fitted=HAND_GUIDED | Capability.TENSION, steps_per_turn=70, counts_per_turn=7)
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


SHORT = (refusals, inputs, by_hand, ends, absurd)
LENGTHY = (ages,)
