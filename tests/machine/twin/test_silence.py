"""A host that falls silent: the board stops what moves, keeps its place, and wants to be greeted anew."""

from __future__ import annotations

from tests.machine.twin.ideal import Machine
from windctl.protocol import messages as m
from windctl.protocol.messages import Cause, Refusal, State


def test_silence_is_two_thousand_ticks_to_the_tick() -> None:
    machine = Machine(beats=False).prepare().arm().go()
    machine.run(700)
    machine.say(m.Beat())
    machine.run()
    machine.run(1999)
    assert machine.board.state == State.TURNING
    machine.run()
    assert (machine.board.state, machine.board.cause) == (State.HELD, Cause.SILENCE)


def test_without_any_beat_it_counts_from_go() -> None:
    machine = Machine(beats=False).prepare().arm()
    machine.run(5000)
    machine.go()
    machine.run(1999)
    assert machine.board.state == State.TURNING
    machine.run()
    assert machine.board.cause == Cause.SILENCE


def test_a_beat_in_the_last_tick_is_in_time() -> None:
    machine = Machine(beats=False).prepare().arm().go()
    machine.run(1999)
    machine.say(m.Beat())
    machine.run(2000)
    assert machine.board.state == State.TURNING


def test_other_messages_are_no_sign_that_the_record_is_healthy() -> None:
    machine = Machine(beats=False).prepare().arm().go()
    for _ in range(19):
        machine.run(99)
        machine.do(m.Pace(*machine.consent, 6000))
    assert machine.board.state == State.TURNING
    machine.run(101)
    assert machine.board.state == State.HELD


def test_it_keeps_its_place_and_goes_on_after_greet_and_go() -> None:
    machine = Machine(beats=False).prepare().arm(stop=60_000).go()
    machine.run_until(lambda: machine.board.state == State.HELD)
    machine.run_to_rest()
    assert machine.refusal(m.Go(*machine.consent)) == (Refusal.NOT_GREETED, 0)
    machine.say(m.Beat())
    machine.run()
    assert machine.refusal(m.Go(*machine.consent)) == (Refusal.NOT_GREETED, 0)
    count = machine.board.count
    machine.beats = True
    identity = machine.greet(nonce=1)  # the same nonce does not continue what silence has ended
    assert identity.count == count
    machine.run(3000)
    assert machine.board.count == count
    machine.go().run_to_rest()
    assert machine.board.count == 60_000


def test_a_hold_is_heard_after_silence_too() -> None:
    machine = Machine(beats=False).prepare().arm().go()
    machine.run_until(lambda: machine.board.state == State.HELD)
    epoch = machine.board.epoch
    machine.say(m.Hold())
    machine.run()
    assert machine.board.epoch == epoch + 1


def test_silence_matters_only_while_something_moves() -> None:
    machine = Machine(beats=False).prepare().arm()
    machine.run(10_000)
    assert machine.board.state == State.READY
    machine.do(m.Disarm())


def test_silence_stops_a_guide_on_its_way() -> None:
    machine = Machine(beats=False).prepare().arm()
    machine.do(m.GuideTo(*machine.consent, 4000, 1000))
    machine.run(1999)
    assert machine.board.state == State.READY
    machine.run(500)
    assert machine.guide == 2001  # one a tick, the tick of GuideTo and that of silence included
    assert (machine.board.state, machine.board.cause) == (State.HELD, Cause.SILENCE)
    assert machine.refusal(m.Disarm()) == (Refusal.NOT_GREETED, 0)
