"""What the board answers to whom: greeting, sequence, repeats, boot and epoch, and the states."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from tests.machine.twin.ideal import LIMITS, PROGRAM, Machine, pack
from windctl.machine.twin import rules
from windctl.protocol import messages as m
from windctl.protocol.frames import encode
from windctl.protocol.messages import Cause, Refusal, State

SETUP = m.Setup(**LIMITS)


def refused(machine: Machine, message: m.HostMessage) -> int:
    return machine.refusal(message)[0]


def test_after_boot_it_says_so_and_hears_only_a_greeting() -> None:
    machine = Machine(boot_number=7)
    machine.run()
    [booted] = machine.notices(m.NoticeKind.BOOTED)
    assert booted.a == 7
    status = machine.statuses()[0]
    assert (status.boot, status.state, status.cause, status.trust) == (7, State.DRIVES_OFF, Cause.BOOT, 0)
    assert refused(machine, SETUP) == Refusal.NOT_GREETED
    assert machine.greet(nonce=99).nonce == 99
    machine.do(SETUP)


def test_identity_tells_everything_that_a_resumed_coil_is_compared_with() -> None:
    machine = Machine(queue=16).prepare([(400, 14)] * 5, coil_token=4711)
    before = machine.greet(nonce=8)
    machine.do(m.SetDatum(*machine.consent, PROGRAM, 1200, -30, 3, 0))
    machine.do(m.Lay(PROGRAM, 3, 1, pack([(400, -14)]).ljust(48, b"\0")))
    identity = machine.greet(nonce=2)
    assert (identity.coil_token, identity.program, identity.queue) == (4711, PROGRAM, 16)
    assert (identity.base, identity.next, identity.executing) == (3, 4, 3)
    assert (identity.count, identity.guide) == (1200, -30)
    assert identity.trust == m.Trust.COUNT | m.Trust.GUIDE
    assert identity.setup_crc != 0
    assert identity.program_crc != before.program_crc
    assert identity.epoch == before.epoch + 1


def test_another_schema_is_answered_and_not_served() -> None:
    machine = Machine()
    answer = machine.ask(m.Greet(nonce=5, schema=m.SCHEMA ^ 1))
    assert isinstance(answer, m.Identity)
    assert (answer.nonce, answer.schema) == (5, m.SCHEMA)
    assert refused(machine, SETUP) == Refusal.NOT_GREETED


def test_only_the_next_number_is_taken() -> None:
    machine = Machine()
    machine.greet()
    machine.sequence += 4
    assert machine.refusal(SETUP) == (Refusal.SEQUENCE, machine.sequence - 4)
    machine.sequence -= 5
    machine.do(SETUP)


def test_a_repeat_of_the_last_command_replays_its_answer_and_does_nothing_again() -> None:
    machine = Machine().prepare()
    arm = machine.say(m.Arm(*machine.consent))
    machine.run()
    epoch = machine.board.epoch
    first = machine.heard[-1] if isinstance(machine.heard[-1], m.Accepted) else machine.heard[-2]
    for _ in range(3):
        machine.heard.clear()
        machine.wire(arm)
        machine.run()
        assert machine.heard[0] == first
    assert machine.board.epoch == epoch
    assert machine.board.state == State.READY


def test_a_refusal_is_replayed_too_although_the_command_could_now_be_done() -> None:
    machine = Machine().prepare()
    machine.pins &= ~m.InputBit.GUARD_OK
    arm = machine.say(m.Arm(*machine.consent))
    machine.run()
    machine.pins |= m.InputBit.GUARD_OK
    machine.run(10)
    machine.heard.clear()
    machine.wire(arm)
    machine.run()
    answer = machine.heard[0]
    assert isinstance(answer, m.Refused)
    assert answer.why == Refusal.INPUT_OPEN
    assert machine.board.state == State.DRIVES_OFF


def test_the_same_number_with_another_command_is_no_repeat() -> None:
    machine = Machine().prepare()
    machine.sequence -= 1
    assert refused(machine, m.Disarm()) == Refusal.SEQUENCE


def test_a_repeated_greeting_is_answered_without_holding() -> None:
    machine = Machine().winding()
    epoch = machine.board.epoch
    machine.sequence += 30
    assert machine.greet(nonce=1).epoch == epoch
    assert machine.board.state == State.TURNING
    machine.sequence -= 31
    machine.do(m.Pace(*machine.consent, 5000))


def test_a_new_greeting_while_turning_holds_and_sets_the_number() -> None:
    machine = Machine().winding()
    epoch = machine.board.epoch
    machine.sequence = 200
    identity = machine.greet(nonce=2)
    assert (identity.state, identity.epoch) == (State.HELD, epoch + 1)
    assert machine.board.cause == Cause.GREET
    machine.run_to_rest()
    machine.do(m.Disarm())


def test_bad_frames_are_counted_and_dropped() -> None:
    machine = Machine().prepare()
    good = encode(m.Hold.CODE, 0, b"")
    machine.wire(b"\x05\x01\x02\0" + good[:2] + b"\0" + b"x" * 300 + b"\0")
    machine.run(60)
    assert machine.statuses()[-1].bad_frames == 3
    assert machine.board.state == State.DRIVES_OFF


def test_a_command_of_unknown_type_is_refused_by_name() -> None:
    machine = Machine().prepare()
    machine.sequence += 1
    machine.wire(encode(0x60, machine.sequence, b"abc"))
    machine.run()
    answer = machine.heard[-1]
    assert isinstance(answer, m.Refused)
    assert (answer.command, answer.why) == (0x60, Refusal.UNKNOWN_TYPE)


# ---------------------------------------------------------------- states


def in_ready(machine: Machine) -> None:
    machine.prepare().arm()


def in_held(machine: Machine) -> None:
    machine.winding()
    machine.say(m.Hold())
    machine.run()
    machine.run_to_rest()


def in_tripped(machine: Machine) -> None:
    machine.winding()
    machine.pins &= ~m.InputBit.GUARD_OK
    machine.run()
    machine.run_until(lambda: machine.board.standing and not machine.board.powered)
    machine.pins |= m.InputBit.GUARD_OK
    machine.run()


WAYS: dict[State, Callable[[Machine], object]] = {
    State.DRIVES_OFF: lambda machine: machine.prepare(),
    State.READY: in_ready,
    State.TURNING: lambda machine: machine.winding(),
    State.HELD: in_held,
    State.TRIPPED: in_tripped,
}

# From the specification's table: what each command may be sent in, in words of its own.
TABLE = """
Setup       drives_off
Arm         drives_off
Disarm                  ready          held
Lay         drives_off  ready turning  held
Pace                    ready turning  held
StopAt                  ready turning  held
Go                      ready          held
GuideTo                 ready          held
SetDatum    drives_off  ready          held  tripped
Measure     drives_off  ready turning  held  tripped
ClearTrip                                    tripped
"""
ALLOWED = {line.split()[0]: set(line.split()[1:]) for line in TABLE.strip().splitlines()}


def command(name: str, machine: Machine) -> m.HostMessage:
    board, consent = machine.board, machine.consent
    ahead = board.count + 100_000
    return {
        "Setup": SETUP,
        "Arm": m.Arm(*consent),
        "Disarm": m.Disarm(),
        "Lay": m.Lay(PROGRAM, board.line.next, 1, pack([(400, 0)]).ljust(48, b"\0")),
        "Pace": m.Pace(*consent, 5000),
        "StopAt": m.StopAt(*consent, ahead),
        "Go": m.Go(*consent),
        "GuideTo": m.GuideTo(*consent, 0, 500),
        "SetDatum": m.SetDatum(*consent, PROGRAM, board.count, 0, 0, 0),
        "Measure": m.Measure(100, 0),
        "ClearTrip": m.ClearTrip(*consent),
    }[name]


@pytest.mark.parametrize("name", ALLOWED)
@pytest.mark.parametrize("state", list(State), ids=lambda state: state.name.lower())
def test_each_command_is_done_in_its_states_and_refused_in_the_others(name: str, state: State) -> None:
    machine = Machine()
    WAYS[state](machine)
    assert machine.board.state == state
    answer = machine.ask(command(name, machine))
    if state.name.lower() in ALLOWED[name]:
        assert isinstance(answer, m.Accepted), answer
    else:
        assert isinstance(answer, m.Refused)
        assert (answer.why, answer.limit) == (Refusal.STATE, state)
        assert machine.board.state == state


def test_the_table_in_the_board_names_every_numbered_command() -> None:
    numbered = {kind.CODE for kind in m.MESSAGES.values() if getattr(kind, "NUMBERED", False)}
    assert set(rules.LEGAL) == numbered - {m.Greet.CODE}


# ---------------------------------------------------------------- nothing starts by itself


@pytest.mark.parametrize("name", ["Arm", "Pace", "StopAt", "Go", "GuideTo", "SetDatum", "ClearTrip"])
@pytest.mark.parametrize("state", list(State), ids=lambda state: state.name.lower())
def test_a_command_delayed_past_a_hold_changes_nothing(name: str, state: State) -> None:
    machine = Machine()
    WAYS[state](machine)
    delayed = command(name, machine)
    machine.say(m.Hold())
    machine.run()
    machine.run_to_rest()
    line, board = machine.board.line, machine.board
    before = (board.state, board.epoch, board.stop_point, board.spindle.pace, board.guide, line.next)
    assert machine.refusal(delayed) == (Refusal.STALE, board.epoch)
    machine.run(3000)
    assert (board.state, board.epoch, board.stop_point, board.spindle.pace, board.guide, line.next) == before
    assert machine.outputs.rate == 0


def test_a_command_meant_for_the_board_before_it_restarted_is_stale_at_any_epoch() -> None:
    machine = Machine().prepare()
    boot, epoch = machine.consent
    machine.board.reboot()
    machine.greet(nonce=2)
    while machine.board.epoch != epoch:
        machine.say(m.Hold())
        machine.run()
    assert machine.refusal(m.Arm(boot, epoch)) == (Refusal.STALE, epoch)


def test_nothing_starts_by_itself_after_power_comes_back() -> None:
    machine = Machine().winding()
    machine.board.reboot()
    machine.outputs.rate = 0
    start = len(machine.paces)
    machine.run(5000)
    assert set(machine.paces[start:]) == {0}
    assert (machine.outputs.drive_enable, machine.outputs.guide_enable) == (0, 0)
    board = machine.board
    assert (board.state, board.boot, board.count, board.trust) == (State.DRIVES_OFF, 2, 0, 0)


def test_nothing_starts_by_itself_after_greeting_again_or_clearing_a_trip() -> None:
    machine = Machine()
    in_tripped(machine)
    start = len(machine.paces)
    machine.greet(nonce=3)
    machine.run(2500)
    machine.do(m.ClearTrip(*machine.consent))
    machine.run(2500)
    assert machine.board.state == State.DRIVES_OFF
    machine.do(m.Arm(*machine.consent))
    machine.run(2500)
    assert machine.board.state == State.READY
    assert set(machine.paces[start:]) == {0}


def test_every_stop_and_every_change_of_permission_raises_the_epoch() -> None:
    machine = Machine()
    machine.greet()
    epochs = [machine.board.epoch]

    def note() -> None:
        epochs.append(machine.board.epoch)

    machine.say(m.Hold())
    machine.run()
    note()
    machine.do(SETUP)
    machine.do(m.SetDatum(*machine.consent, PROGRAM, 0, 0, 0, 0))
    assert machine.board.epoch == epochs[-1]
    machine.lay([(20_000, 0)])
    machine.arm(stop=4000)
    note()
    machine.go()
    assert machine.board.epoch == epochs[-1]
    machine.run_to_rest()
    note()
    machine.do(m.Disarm())
    note()
    machine.greet(nonce=2)
    note()
    assert epochs == list(range(epochs[0], epochs[0] + len(epochs)))


# ---------------------------------------------------------------- Setup and datum


@pytest.mark.parametrize(
    ("change", "limit"),
    [
        ({"counts_per_turn": 0}, 1),
        ({"counts_per_turn": 401}, 400),
        ({"steps_per_turn": 801}, 800),
        ({"max_count": 2**30 + 1}, 2**30),
        ({"max_pace": 15_001}, 15_000),
        ({"accel": 99}, 100),
        ({"decel": 99}, 100),
        ({"decel": 799}, 7990),  # has to stand within ten seconds
        ({"guide_min": 10, "guide_max": 9}, 10),
        ({"tension_low": 10, "tension_high": 9}, 10),
        ({"rotation": 2}, 1),
    ],
)
def test_setup_refuses_what_the_board_cannot_keep(change: dict[str, int], limit: int) -> None:
    machine = Machine()
    machine.greet()
    assert machine.refusal(m.Setup(**(LIMITS | change))) == (Refusal.RANGE, limit)
    assert machine.board.setup is None
    assert refused(machine, m.Arm(*machine.consent)) == Refusal.NO_SETUP


def test_setup_refuses_what_is_not_fitted() -> None:
    machine = Machine(capabilities=int(m.Capability.DRIVE_STEP))
    machine.greet()
    assert machine.refusal(SETUP) == (Refusal.NOT_FITTED, m.Capability.DRIVE_STEP)


def test_the_same_setup_again_changes_nothing_and_another_one_voids_the_place() -> None:
    machine = Machine().prepare()
    machine.do(SETUP)
    assert machine.board.trust == m.Trust.COUNT | m.Trust.GUIDE
    assert machine.board.line.program == PROGRAM
    machine.do(m.Setup(**(LIMITS | {"max_count": 999})))
    assert machine.board.trust == 0
    assert machine.board.line.program == 0
    machine.do(m.Arm(*machine.consent))
    machine.do(m.Pace(*machine.consent, 100))
    assert refused(machine, m.Go(*machine.consent)) == Refusal.NO_DATUM


def test_a_datum_needs_a_setup_and_its_limits() -> None:
    machine = Machine()
    machine.greet()
    assert refused(machine, m.SetDatum(*machine.consent, 1, 0, 0, 0, 0)) == Refusal.NO_SETUP
    machine.do(SETUP)
    assert machine.refusal(m.SetDatum(*machine.consent, 1, 0, 4001, 0, 0)) == (Refusal.RANGE, 4000)
    assert machine.refusal(m.SetDatum(*machine.consent, 1, 0, -4001, 0, 0)) == (Refusal.RANGE, -4000)
    too_far = m.SetDatum(*machine.consent, 1, -(2**30) - 1, 0, 0, 0)
    assert machine.refusal(too_far) == (Refusal.RANGE, -(2**30))


def test_status_comes_every_fifty_ticks_and_at_once_when_the_state_changes() -> None:
    machine = Machine().prepare()
    machine.heard.clear()
    machine.run(1000)
    times = [status.ticks for status in machine.statuses()]
    assert times == [t for t in range(times[0], times[0] + 1000) if t % 50 == 0]
    machine.run(7)
    machine.do(m.Arm(*machine.consent))
    assert machine.statuses()[-1].ticks == machine.board.ticks
    assert machine.statuses()[-1].state == State.READY
