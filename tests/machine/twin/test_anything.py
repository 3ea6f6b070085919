"""Anything in any order: a host that errs, frames that come late or twice, inputs that open, power that goes.

Whatever happens, the board moves only after a Go meant for this very moment, and never beyond its limits.
"""

from __future__ import annotations

import hypothesis.strategies as st
from hypothesis import settings
from hypothesis.stateful import RuleBasedStateMachine, initialize, rule

from tests.machine.twin.ideal import LIMITS, PROGRAM, Machine, pack
from windctl.protocol import messages as m
from windctl.protocol.frames import FrameReader
from windctl.protocol.messages import State

PINS = [m.InputBit.STOP_OK, m.InputBit.GUARD_OK, m.InputBit.GUIDE_HIGH_OK]
SEGMENTS = [(2000, 100), (2000, -100)]
MAX_COUNT = 60_000
QUICK = {"max_count": MAX_COUNT, "decel": 9000, "accel": 9000}


class Anything(RuleBasedStateMachine):
    """Rules are what a host, a line, an operator and a machine may do; every tick is checked."""

    @initialize()
    def begin(self) -> None:
        self.machine = Machine(beats=False, queue=32)
        self.frames: list[bytes] = []
        self.consents = [(1, 0)]
        self.fresh_go: bytes | None = None
        self.machine.prepare(SEGMENTS * 5, **QUICK)
        self.machine.arm(pace=8000)

    # ------------------------------------------------------------ what every tick has to satisfy

    def pass_time(self, ticks: int) -> None:
        machine, board = self.machine, self.machine.board
        for _ in range(ticks):
            state, rate, epoch = board.state, machine.outputs.rate, board.epoch
            machine.run()
            turning = board.state == State.TURNING
            if turning and state != State.TURNING:
                assert self.go_was_meant_for == (board.boot, epoch)
            if machine.outputs.rate > rate:
                assert turning
            assert machine.outputs.rate == 0 or machine.outputs.drive_enable
            assert machine.outputs.rate <= LIMITS["max_pace"]
            if board.state in (State.DRIVES_OFF, State.READY):
                assert machine.outputs.rate == 0
            if board.state == State.DRIVES_OFF:
                assert not machine.outputs.drive_enable and not machine.outputs.guide_enable
            if machine.outputs.rate:
                assert board.count <= min(MAX_COUNT, board.line.end, board.stop_point)
            assert LIMITS["guide_min"] <= board.guide <= LIMITS["guide_max"]
            self.go_was_meant_for = None

    go_was_meant_for: tuple[int, int] | None = None

    def send(self, message: m.HostMessage) -> None:
        frame = self.machine.say(message)
        self.note(frame)
        self.frames.append(frame)
        self.pass_time(1)

    def note(self, frame: bytes) -> None:
        [read] = FrameReader().feed(frame)
        if read.code == m.Go.CODE:
            go = m.Go.decode_body(read.body)
            self.go_was_meant_for = (go.boot, go.epoch)

    def consent(self, late: int) -> tuple[int, int]:
        self.consents.append(self.machine.consent)
        return self.consents[-1 - min(late, len(self.consents) - 1)]

    # ------------------------------------------------------------ what may happen

    @rule(ticks=st.integers(1, 700), beat=st.booleans())
    def time(self, ticks: int, beat: bool) -> None:
        if beat:
            self.send(m.Beat())
        self.pass_time(ticks)

    @rule()
    def rest(self) -> None:
        for _ in range(40):
            self.send(m.Beat())
            self.pass_time(100)
            if self.machine.board.standing:
                return

    late = st.sampled_from([0, 0, 0, 1, 3])

    @rule(late=late)
    def go(self, late: int) -> None:
        self.send(m.Go(*self.consent(late)))

    @rule(late=late)
    def arm(self, late: int) -> None:
        self.send(m.Arm(*self.consent(late)))

    @rule(late=late, pace=st.sampled_from([500, 4000, 8000, 9000]))
    def pace(self, late: int, pace: int) -> None:
        self.send(m.Pace(*self.consent(late), pace))

    @rule(late=late, ahead=st.integers(-500, 9000))
    def stop_at(self, late: int, ahead: int) -> None:
        self.send(m.StopAt(*self.consent(late), max(0, self.machine.board.count + ahead)))

    @rule(late=late, guide=st.integers(-5000, 5000))
    def guide_to(self, late: int, guide: int) -> None:
        self.send(m.GuideTo(*self.consent(late), guide, 2000))

    @rule(late=late)
    def set_datum(self, late: int) -> None:
        board = self.machine.board
        self.send(m.SetDatum(*self.consent(late), PROGRAM, board.count, board.guide, 3, 0))

    @rule(late=late)
    def clear_trip(self, late: int) -> None:
        self.send(m.ClearTrip(*self.consent(late)))

    @rule(n=st.integers(0, 12), skip=st.sampled_from([0, 0, 0, 1]))
    def lay(self, n: int, skip: int) -> None:
        first = self.machine.board.line.next + skip
        self.send(m.Lay(PROGRAM, first, n, pack((SEGMENTS * 6)[:n]).ljust(48, b"\0")))

    @rule()
    def disarm(self) -> None:
        self.send(m.Disarm())

    @rule()
    def hold(self) -> None:
        self.send(m.Hold())

    @rule(nonce=st.integers(0, 3))
    def greet(self, nonce: int) -> None:
        self.send(m.Greet(nonce, m.SCHEMA))

    @rule()
    def set_up(self) -> None:
        self.send(m.Setup(**(LIMITS | QUICK)))

    @rule(back=st.integers(0, 30))
    def an_old_frame_arrives_again(self, back: int) -> None:
        if self.frames:
            frame = self.frames[max(0, len(self.frames) - 1 - back)]
            self.machine.wire(frame)
            self.note(frame)
            self.pass_time(1)

    @rule(junk=st.binary(max_size=20))
    def junk_arrives(self, junk: bytes) -> None:
        self.machine.wire(junk + b"\0")
        self.pass_time(1)

    @rule(pin=st.sampled_from(PINS))
    def an_input_opens_or_closes(self, pin: int) -> None:
        self.machine.pins ^= pin
        self.pass_time(1)

    @rule()
    def inputs_close(self) -> None:
        self.machine.pins |= PINS[0] | PINS[1] | PINS[2]
        self.pass_time(1)

    @rule(counts=st.integers(-20, 20))
    def a_hand_turns_the_spindle_without_power(self, counts: int) -> None:
        if not self.machine.outputs.drive_enable:
            self.machine.turn(counts)
            self.pass_time(1)

    @rule(sure=st.integers(0, 3))
    def power_goes_and_comes(self, sure: int) -> None:
        if sure == 0:
            self.machine.board.reboot()
            self.machine.outputs.rate = 0
            self.pass_time(1)

    @rule(nonce=st.integers(10, 99))
    def the_operator_puts_everything_right_and_goes(self, nonce: int) -> None:
        self.inputs_close()
        self.greet(nonce)
        self.rest()
        self.clear_trip(0)
        self.set_up()
        self.set_datum(0)
        self.lay(12, 0)
        self.arm(0)
        self.pace(0, 8000)
        self.go(0)
        self.time(700, True)


Anything.TestCase.settings = settings(max_examples=30, stateful_step_count=40)
TestAnything = Anything.TestCase
