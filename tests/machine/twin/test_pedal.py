"""The hold-to-run pedal: it asks, it never starts; letting it go always stops."""

from __future__ import annotations

from tests.machine.twin.ideal import EVERYTHING_BUT_PEDAL, Machine
from windctl.protocol import messages as m
from windctl.protocol.messages import Cause, Refusal, State

FITTED = EVERYTHING_BUT_PEDAL | m.Capability.PEDAL


def ready() -> Machine:
    return Machine().prepare(fitted=FITTED).arm()


def press(machine: Machine, ticks: int = 25) -> None:
    machine.pins |= m.InputBit.PEDAL_DOWN
    machine.run(ticks)


def release(machine: Machine) -> None:
    machine.pins &= ~m.InputBit.PEDAL_DOWN
    machine.run()


def test_a_fresh_press_asks_and_go_is_the_answer() -> None:
    machine = ready()
    assert machine.refusal(m.Go(*machine.consent)) == (Refusal.PEDAL_UP, 0)
    press(machine)
    assert len(machine.notices(m.NoticeKind.PEDAL_ASKS)) == 1
    machine.run(1000)
    assert machine.board.state == State.READY
    machine.go()


def test_letting_go_holds_at_once_and_pressing_again_only_asks() -> None:
    machine = ready()
    press(machine)
    machine.go()
    machine.run(1000)
    release(machine)
    assert (machine.board.state, machine.board.cause) == (State.HELD, Cause.PEDAL)
    press(machine)
    assert len(machine.notices(m.NoticeKind.PEDAL_ASKS)) == 2  # also while it still brakes
    machine.run_to_rest()
    machine.run(1000)
    assert machine.board.state == State.HELD
    machine.go()


def test_a_pedal_that_is_down_already_arms_nothing() -> None:
    machine = Machine().prepare(fitted=FITTED)
    press(machine)
    assert machine.refusal(m.Arm(*machine.consent)) == (Refusal.PEDAL_DOWN, 0)
    release(machine)
    machine.do(m.Arm(*machine.consent))


def test_a_pedal_kept_down_over_a_stop_has_to_be_let_go_first() -> None:
    machine = ready()
    machine.do(m.StopAt(*machine.consent, 8000))
    press(machine)
    machine.go().run_to_rest()
    assert (machine.board.state, machine.board.cause) == (State.HELD, Cause.STOP_POINT)
    machine.do(m.StopAt(*machine.consent, 9000))
    assert machine.refusal(m.Go(*machine.consent)) == (Refusal.PEDAL_DOWN, 0)
    release(machine)
    press(machine)
    machine.go()


def test_a_hold_makes_a_press_stale() -> None:
    machine = ready()
    press(machine)
    machine.say(m.Hold())
    machine.run()
    assert machine.refusal(m.Go(*machine.consent)) == (Refusal.PEDAL_DOWN, 0)


def test_a_bounce_is_not_a_press() -> None:
    machine = ready()
    for _ in range(4):
        press(machine, 15)
        release(machine)
    assert machine.notices(m.NoticeKind.PEDAL_ASKS) == []
    press(machine, 20)
    assert machine.notices(m.NoticeKind.PEDAL_ASKS) == []
    machine.run()
    assert len(machine.notices(m.NoticeKind.PEDAL_ASKS)) == 1


def test_a_pedal_that_is_not_fitted_is_not_listened_to() -> None:
    machine = Machine().prepare().arm()
    press(machine)
    machine.go()
    release(machine)
    assert machine.board.state == State.TURNING
    assert machine.notices(m.NoticeKind.PEDAL_ASKS) == []
