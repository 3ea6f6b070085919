"""The host's side of the conversation, against a board that says what each test makes it say."""

from __future__ import annotations

from binascii import crc_hqx
from dataclasses import replace

import pytest

from windctl.errors import LinkLost, MachineError, ProgramMismatch
from windctl.protocol.frames import encode
from windctl.protocol.messages import (
    SCHEMA,
    Accepted,
    Arm,
    Beat,
    BoardMessage,
    Capability,
    ClearTrip,
    Disarm,
    Go,
    Greet,
    GuideTo,
    Hold,
    Lay,
    Measure,
    Notice,
    Pace,
    Reading,
    Refusal,
    SetDatum,
    Setup,
    State,
    StopAt,
)
from windctl.protocol.wants import Datum, GuidePlace, Permission, Sampling, Wants

from .talking import AT_REST, IDENTITY, PROGRAM, SETUP, Bench, only

NOTHING = Wants()


# ---------------------------------------------------------------- greeting


def test_it_begins_with_a_lone_zero_byte_and_a_greeting() -> None:
    bench = Bench()
    data = bench.c.advance(NOTHING, 0.0)
    assert data[0] == 0
    assert not bench.c.board.greeted
    bench = Bench()
    greet = only(bench.advance(NOTHING))
    assert isinstance(greet, Greet)
    assert greet.schema == SCHEMA


def test_an_unanswered_greeting_is_repeated_as_the_same_bytes_for_three_seconds() -> None:
    bench = Bench()
    first = bench.c.advance(NOTHING, 0.0)
    repeated = 0
    for step in range(1, 60):
        data = bench.c.advance(NOTHING, step * 0.05)
        if data:
            assert data == first[1:]
            repeated += 1
    assert repeated == 11
    with pytest.raises(MachineError, match="no board answered within 3 s; nothing was heard"):
        bench.c.advance(NOTHING, 3.01)
    with pytest.raises(MachineError):
        bench.c.advance(Wants(hold=True), 9.0)


def test_noise_instead_of_an_answer_points_to_the_baud_rate() -> None:
    bench = Bench()
    bench.c.receive(b"\x12\x34\0\x55\x66\x77\0", 0.0)
    with pytest.raises(MachineError, match=r"2 damaged or unknown frames.*baud rate"):
        for step in range(100):
            bench.c.advance(NOTHING, step * 0.1)


def test_only_the_answer_to_its_own_greeting_counts() -> None:
    bench = Bench()
    greet = only(bench.advance(NOTHING))
    assert isinstance(greet, Greet)
    assert bench.hear(replace(IDENTITY, nonce=greet.nonce ^ 1)) == []
    assert not bench.c.board.greeted
    right = replace(IDENTITY, nonce=greet.nonce)
    assert bench.hear(right) == [right]
    assert bench.c.board.greeted
    assert bench.c.board.permission == Permission(7, 20)
    assert bench.hear(replace(right, epoch=21, count=5)) == []  # the same answer once more, and later
    assert bench.c.board.permission == Permission(7, 20)


def test_another_schema_is_named_with_ours_and_ends_the_conversation() -> None:
    bench = Bench()
    greet = only(bench.advance(NOTHING))
    assert isinstance(greet, Greet)
    assert bench.hear(replace(IDENTITY, nonce=greet.nonce, schema=0xDEADBEEF)) == []
    for wants in (NOTHING, Wants(hold=True)):  # not even a hold: it might mean something else there
        with pytest.raises(MachineError) as caught:
            bench.advance(wants)
        assert "deadbeef" in str(caught.value)
        assert f"{SCHEMA:08x}" in str(caught.value)


def test_nothing_is_believed_before_the_greeting() -> None:
    bench = Bench()
    assert bench.tell(epoch=90, state=State.TURNING) == []
    assert bench.c.board.status is None
    assert bench.hear(Reading(1, 2, 3, 100, 2000, 0)) == []
    assert bench.hear(Notice(1, 2, 3, 4)) == []


def test_a_board_that_started_again_is_greeted_again() -> None:
    bench = Bench()
    bench.greet()
    assert bench.advance(NOTHING) == []
    assert bench.tell(boot=8, epoch=0, ticks=40) != []
    assert not bench.c.board.greeted
    assert bench.c.board.permission is None
    assert bench.c.board.boot == 8
    assert isinstance(only(bench.advance(NOTHING)), Greet)


def test_a_board_that_wants_a_greeting_gets_one_with_another_nonce_and_number() -> None:
    bench = Bench()
    bench.greet()
    before = bench.last_sequence
    old = bench.identity.nonce
    command = only(bench.advance(Wants(setup=SETUP)))
    bench.refuse(command, Refusal.NOT_GREETED)
    greet = only(bench.advance(Wants(setup=SETUP)))
    assert isinstance(greet, Greet)
    assert greet.nonce != old
    assert 50 < (bench.last_sequence - before) & 0xFF < 206  # far from anything that is still on its way


# ---------------------------------------------------------------- the order in which wants are met


def prepared(bench: Bench) -> Wants:
    """Everything wanted at once for a fresh coil."""
    return Wants(
        setup=SETUP,
        datum=Datum(0, 0, 0, 0, bench.permission),
        program=PROGRAM,
        armed=bench.permission,
        pace=3000,
        stop_point=5000,
        sampling=Sampling(200, 250),
    )


def lay_all(bench: Bench, wants: Wants) -> list[Lay]:
    """Accept Lay after Lay until none comes; the running sum is the program's."""
    laid: list[Lay] = []
    while True:
        sent = bench.advance(wants)
        if not sent or not isinstance(sent[-1], Lay):
            return laid
        laid.append(sent[-1])
        bench.accept(sent[-1])


def crc(bench: Bench, upto: int) -> int:
    return crc_hqx(PROGRAM.packed[: 4 * upto], 0xFFFF)


def ready_to_go() -> tuple[Bench, Wants]:
    """A board armed and prepared in epoch 21, all but the Go done."""
    bench = Bench()
    bench.greet()
    wants = prepared(bench)
    for kind in (Setup, SetDatum):
        command = only(bench.advance(wants))
        assert isinstance(command, kind)
        bench.accept(command)
    filled = []
    command = only(bench.advance(wants))
    while isinstance(command, Lay):
        filled.append(command)
        bench.accept(command)
        command = only(bench.advance(wants))
    assert [(lay.first, lay.n) for lay in filled] == [(0, 12), (12, 12), (24, 8)]  # 32 places
    assert isinstance(command, Arm)
    bench.accept(command, epoch=21)
    bench.tell(epoch=21, state=State.READY, next=32, program_crc=crc(bench, 32))
    for expected in (StopAt(7, 21, 5000), Pace(7, 21, 3000), Measure(200, 250)):
        assert only(bench.advance(wants)) == expected
        bench.accept(expected)
    assert bench.advance(wants) == []  # the consent was for powering the drives: epoch 20
    return bench, replace(wants, datum=None, armed=None)


def test_everything_goes_in_its_order_and_once() -> None:
    bench, wants = ready_to_go()
    go = replace(wants, go=bench.permission)
    assert only(bench.advance(go)) == Go(7, 21)
    bench.accept(Go(7, 21))
    bench.tell(state=State.TURNING, inputs=3, speed=100)
    for _ in range(20):
        assert bench.advance(go, 0.05) == []
        bench.tell()


def test_what_is_so_already_is_not_said() -> None:
    bench = Bench()
    bench.greet(setup_crc=crc_hqx(SETUP.encode_body(), 0xFFFF))
    assert bench.advance(Wants(setup=SETUP)) == []


def test_setup_waits_for_drives_off_and_everything_else_for_setup() -> None:
    bench = Bench()
    bench.greet(state=State.HELD)
    wants = replace(prepared(bench), go=bench.permission, datum=None)
    assert bench.advance(wants) == []
    disarm = only(bench.advance(replace(wants, disarmed=True)))
    assert isinstance(disarm, Disarm)
    bench.accept(disarm, epoch=21)
    bench.tell(epoch=21, state=State.DRIVES_OFF)
    assert isinstance(only(bench.advance(wants)), Setup)


@pytest.mark.parametrize("changes", [{"inputs": 3}, {"speed": 5}])
def test_nothing_that_needs_rest_is_sent_before_the_board_says_it_rests(changes: dict[str, int]) -> None:
    bench, wants = ready_to_go()
    go = replace(wants, go=bench.permission)
    bench.tell(**changes)
    assert bench.advance(go) == []
    bench.tell(inputs=AT_REST, speed=0)
    assert bench.advance(go) == [Go(7, 21)]


def test_go_needs_a_pace_where_the_board_drives() -> None:
    bench, wants = ready_to_go()
    assert bench.advance(replace(wants, go=bench.permission, pace=0)) == []


def test_a_trip_is_cleared_once_and_only_for_the_epoch_it_was_agreed_for() -> None:
    bench = Bench()
    bench.greet(state=State.TRIPPED, trip=2)
    assert bench.advance(Wants(clear_trip=Permission(7, 19))) == []
    assert bench.advance(Wants(clear_trip=Permission(6, 20))) == []
    clear = only(bench.advance(Wants(clear_trip=bench.permission)))
    assert clear == ClearTrip(7, 20)
    bench.refuse(clear, Refusal.INPUT_OPEN)
    for _ in range(5):
        bench.tell()
        assert bench.advance(Wants(clear_trip=bench.permission)) == []


def test_a_datum_is_declared_once_and_again_only_after_the_board_has_turned() -> None:
    bench = Bench()
    bench.greet()
    datum = Datum(40, 3, 1, 5, bench.permission)
    wants = Wants(program=PROGRAM, datum=datum)
    command = only(bench.advance(wants))
    assert command == SetDatum(7, 20, PROGRAM.id32, 40, 3, 1, 5)
    bench.accept(command)
    assert all(lay.first >= 1 for lay in lay_all(bench, wants))
    # A hold raises the epoch; the same place declared for the new epoch is what the board has.
    bench.tell(epoch=21)
    assert lay_all(bench, replace(wants, datum=replace(datum, given_for=bench.permission))) == []
    other = replace(datum, count=41, given_for=bench.permission)
    assert isinstance(only(bench.advance(replace(wants, datum=other))), SetDatum)


def test_the_guide_is_brought_to_its_place_before_the_place_is_declared_and_before_anything_turns() -> None:
    bench, ready = ready_to_go()
    consent = bench.permission
    wants = replace(
        ready,
        guide=GuidePlace(120, 900, consent),
        datum=Datum(2000, 120, 10, 0, consent),
        go=consent,
    )
    assert only(bench.advance(wants)) == GuideTo(7, 21, 120, 900)
    bench.accept(GuideTo(7, 21, 120, 900))
    bench.tell(guide=60, inputs=3)
    assert bench.advance(wants) == []  # on its way; said once
    bench.tell(guide=120, inputs=3)
    assert bench.advance(wants) == []  # there, and not yet at rest
    bench.tell(inputs=AT_REST)
    datum = only(bench.advance(wants))
    assert datum == SetDatum(7, 21, PROGRAM.id32, 2000, 120, 10, 0)
    bench.accept(datum)
    bench.tell(next=10, executing=10, program_crc=0xFFFF)
    sent = [only(bench.advance(wants))]
    while not isinstance(sent[-1], Go):
        bench.accept(sent[-1])
        upto = bench.c.board.next
        bench.tell(next=upto, program_crc=crc_hqx(PROGRAM.packed[40 : 4 * upto], 0xFFFF))
        sent.append(only(bench.advance(wants)))
    assert {type(one) for one in sent} == {Lay, StopAt, Go}  # an emptied queue knows no stop point


@pytest.mark.parametrize("state", [State.DRIVES_OFF, State.TRIPPED, State.TURNING])
def test_the_guide_moves_only_with_the_drives_powered_and_for_its_consent(state: State) -> None:
    bench = Bench()
    bench.greet(state=state)
    assert bench.advance(Wants(guide=GuidePlace(120, 900, bench.permission))) == []
    bench.tell(state=State.READY)
    assert bench.advance(Wants(guide=GuidePlace(120, 900, Permission(7, 19)))) == []
    moved = Wants(guide=GuidePlace(120, 900, bench.permission))
    assert bench.advance(replace(moved, hold=True)) == [Hold()]
    bench.tell(epoch=21, state=State.HELD)
    bench.advance(Wants())
    assert bench.advance(moved) == []  # the hold voided what was consented to


def test_sampling_is_begun_changed_and_ended() -> None:
    bench = Bench()
    bench.greet()
    for sampling, expected in (
        (Sampling(200, 250), Measure(200, 250)),
        (Sampling(100, 100), Measure(100, 100)),
        (None, Measure(0, 0)),
    ):
        assert only(bench.advance(Wants(sampling=sampling))) == expected
        bench.accept(expected)
        assert bench.advance(Wants(sampling=sampling)) == []


def test_a_new_place_or_setup_voids_the_stop_point_and_the_pace_that_were_said_before() -> None:
    bench, wants = ready_to_go()
    moved = replace(wants, datum=Datum(400, 0, 4, 0, bench.permission))
    command = only(bench.advance(moved))
    assert isinstance(command, SetDatum)
    bench.accept(command)
    lay_all(bench, moved)
    assert bench.everything[-1][1] == StopAt(7, 21, 5000)


def test_where_a_hand_guides_the_wire_nothing_is_laid_and_go_does_not_wait_for_it() -> None:
    bench = Bench()
    bench.greet()
    wants = replace(prepared(bench), setup=replace(SETUP, fitted=Capability.DRIVE_STEP))
    for name in ("Setup", "SetDatum", "Arm"):
        command = only(bench.advance(wants))
        assert name == command.NAME
        bench.accept(command, epoch=21 if name == "Arm" else 20)
    bench.tell(epoch=21, state=State.READY)
    wants = replace(wants, go=bench.permission)
    for name in ("StopAt", "Pace", "Measure", "Go"):
        command = only(bench.advance(wants))
        assert name == command.NAME
        bench.accept(command)


def test_a_counter_needs_neither_program_nor_pace() -> None:
    bench = Bench()
    bench.greet(capabilities=0, state=State.READY)
    counter = Wants(datum=Datum(0, 0, 0, 0, bench.permission), go=bench.permission, stop_point=40)
    for name in ("SetDatum", "StopAt", "Go"):
        command = only(bench.advance(counter))
        assert name == command.NAME
        bench.accept(command)


# ---------------------------------------------------------------- consent


def test_a_go_is_never_sent_for_another_boot_or_epoch() -> None:
    bench, wants = ready_to_go()
    for boot in (6, 8):
        assert bench.advance(replace(wants, go=Permission(boot, 21))) == []
    for epoch in (0, 20, 22, 0xFFFF):
        assert bench.advance(replace(wants, go=Permission(7, epoch))) == []


def test_an_answer_that_raises_the_epoch_voids_the_consent_at_once() -> None:
    bench, wants = ready_to_go()
    go = replace(wants, go=bench.permission, stop_point=6000)
    command = only(bench.advance(go))
    assert isinstance(command, StopAt)
    bench.accept(command, epoch=22)  # the pedal was let go meanwhile
    assert all(not isinstance(message, Go) for _ in range(5) for message in bench.advance(go, 0.3))


def test_a_used_go_does_not_start_anything_again_after_a_stop_in_the_same_epoch() -> None:
    bench, wants = ready_to_go()
    go = replace(wants, go=bench.permission)
    bench.accept(only(bench.advance(go)))
    bench.tell(state=State.HELD)  # a board that forgot to raise its epoch
    assert bench.advance(go) == []
    assert bench.advance(wants) == []
    assert bench.advance(go) == []  # withdrawn and wanted again: used is used


def test_a_refused_go_waits_for_somebody_to_ask_anew() -> None:
    bench, wants = ready_to_go()
    go = replace(wants, go=bench.permission)
    command = only(bench.advance(go))
    assert bench.refuse(command, Refusal.INPUT_OPEN) != []
    bench.tell(inputs=AT_REST & ~2)
    assert bench.advance(go) == []
    bench.tell(inputs=AT_REST)  # the guard is closed: that must not start the spindle
    assert bench.advance(go) == []
    assert bench.advance(wants) == []
    assert bench.advance(go) == [Go(7, 21)]


# ---------------------------------------------------------------- hold


def outstanding_go() -> tuple[Bench, Wants]:
    bench, wants = ready_to_go()
    go = replace(wants, go=bench.permission)
    assert only(bench.advance(go)) == Go(7, 21)
    return bench, go


def test_hold_overtakes_an_outstanding_command_in_the_very_call() -> None:
    bench, go = outstanding_go()
    assert isinstance(bench.advance(replace(go, hold=True))[0], Hold)


def test_hold_is_said_before_the_greeting_and_the_beat() -> None:
    bench = Bench()
    assert [type(message) for message in bench.advance(Wants(hold=True, beat=True))] == [Hold, Beat, Greet]


def test_hold_is_repeated_until_the_board_shows_that_it_obeyed() -> None:
    bench, wants = ready_to_go()
    go = replace(wants, go=bench.permission)
    bench.accept(only(bench.advance(go)))
    bench.tell(state=State.TURNING, inputs=3, speed=2000)
    hold = replace(go, hold=True)
    said = sum(isinstance(message, Hold) for _ in range(20) for message in bench.advance(hold, 0.01))
    assert said == 4  # at once and then every 50 ms
    bench.tell()  # still turning: the hold was lost
    assert any(isinstance(message, Hold) for message in bench.advance(hold, 0.05))
    bench.tell(state=State.HELD)  # stands, but for another reason: in the old epoch
    assert any(isinstance(message, Hold) for message in bench.advance(hold, 0.05))
    bench.tell(epoch=22, state=State.HELD, speed=1500)
    for _ in range(20):
        assert not any(isinstance(message, Hold) for message in bench.advance(hold, 0.05))
        bench.tell()


def test_a_hold_begun_is_carried_through_even_if_not_wanted_any_more() -> None:
    bench, go = outstanding_go()
    bench.advance(replace(go, hold=True))
    assert any(isinstance(message, Hold) for message in bench.advance(go, 0.06))


def test_after_a_hold_nothing_of_the_old_epoch_is_sent_again() -> None:
    bench, go = outstanding_go()
    hold = replace(go, hold=True)
    bench.advance(hold)
    mark = len(bench.everything)
    for _ in range(100):
        bench.advance(hold, 0.05)
        bench.tell()
    for _ in range(100):
        bench.advance(go, 0.05)
        bench.tell()
    later = [message for _, message in bench.everything[mark:]]
    assert not [message for message in later if message.MOVES]
    assert any(isinstance(message, Greet) for message in later)  # the number of the Go is unsure: anew


def test_a_board_found_turning_under_a_hold_is_held_again() -> None:
    bench = Bench()
    bench.greet()
    hold = Wants(hold=True)
    bench.advance(hold)
    bench.tell(epoch=21, state=State.HELD)
    assert bench.advance(hold, 0.05) == []
    bench.tell(epoch=22, state=State.TURNING)
    assert isinstance(bench.advance(hold, 0.001)[0], Hold)


def test_nothing_starts_while_a_hold_is_wanted() -> None:
    bench, wants = ready_to_go()
    hold = replace(wants, hold=True, pace=1000, stop_point=400)
    bench.advance(hold)
    bench.tell(epoch=22, state=State.HELD)
    go = replace(hold, go=bench.permission, armed=bench.permission)
    assert bench.advance(go, 0.05) == []
    bench.tell(epoch=22, state=State.DRIVES_OFF)
    assert bench.advance(go, 0.05) == []


# ---------------------------------------------------------------- lost, late and repeated


def test_a_lost_answer_leads_to_the_same_bytes_and_a_replayed_answer_ends_it() -> None:
    bench, go = outstanding_go()
    number = bench.last_sequence
    assert bench.advance(go, 0.1) == []
    assert bench.advance(go, 0.16) == [Go(7, 21)]
    assert bench.last_sequence == number
    assert bench.c.counters.retries == 1
    bench.accept(Go(7, 21))
    bench.accept(Go(7, 21))  # both answers arrive
    assert bench.advance(go, 0.3) == []
    assert bench.c.counters.dropped == 1


def test_an_answer_to_another_number_or_command_answers_nothing() -> None:
    bench, go = outstanding_go()
    assert bench.hear(Accepted(Arm.CODE, 21, 0)) == []
    assert bench.hear(Accepted(Go.CODE, 21, 0), sequence=bench.last_sequence - 1) == []
    assert bench.advance(go, 0.3) == [Go(7, 21)]


def test_a_command_unanswered_for_three_seconds_loses_the_link_but_a_hold_can_still_be_said() -> None:
    bench, go = outstanding_go()
    with pytest.raises(LinkLost, match="did not answer Go within 3 s"):
        for _ in range(80):
            bench.tell()
            bench.advance(go, 0.05)
    assert isinstance(only(bench.advance(replace(go, hold=True), 0.05)), Hold)
    with pytest.raises(LinkLost):
        bench.advance(go, 0.01)


def test_silence_of_a_board_that_was_heard_loses_the_link() -> None:
    bench = Bench()
    bench.greet()
    bench.advance(NOTHING, 2.9)
    with pytest.raises(LinkLost, match="nothing was heard from the board for 3 s"):
        bench.advance(NOTHING, 0.2)


def test_a_computer_that_slept_does_not_take_its_own_absence_for_the_boards() -> None:
    bench, go = outstanding_go()
    bench.now += 100.0
    bench.tell()
    assert bench.advance(go) == [Go(7, 21)]


def test_a_pause_of_the_host_is_no_silence_of_the_board_and_no_missing_answer() -> None:
    bench, go = outstanding_go()
    for _ in range(11):
        bench.advance(go, 0.25)
        bench.tell()
    bench.now += 100.0
    bench.c.paused(100.0)
    bench.advance(go)  # still within the last try's time
    with pytest.raises(LinkLost):
        bench.advance(go, 3.1)


def test_a_late_status_does_not_move_the_picture_back() -> None:
    bench = Bench()
    bench.greet()
    bench.tell(count=500)
    late = replace(bench.status, ticks=bench.status.ticks - 50, count=400)
    assert bench.hear(late) == []
    assert bench.hear(bench.status) == []  # a repetition
    assert bench.c.board.status == bench.status
    assert bench.hear(replace(bench.status, ticks=bench.status.ticks + 50, epoch=19)) == []


def test_ticks_epochs_and_boot_numbers_wrap() -> None:
    bench = Bench()
    bench.greet(boot=0xFFFF, epoch=0xFFFF)
    bench.tell(ticks=0xFFFFFFF0)
    assert bench.c.board.last_ticks == 1050  # more than half the range ahead is behind
    bench = Bench()
    bench.status = replace(bench.status, ticks=0xFFFFFFD0)
    bench.greet(boot=0xFFFF, epoch=0xFFFF)
    assert bench.tell(count=9) != []
    assert bench.c.board.last_ticks == 0xFFFFFFD0 + 100 - (1 << 32)
    assert bench.tell(epoch=0) != []
    assert bench.c.board.epoch == 0
    assert bench.hear(replace(bench.status, ticks=200, epoch=0xFFFF)) == []
    assert bench.tell(boot=0) != []
    assert not bench.c.board.greeted


def test_late_words_of_the_boards_former_life_are_dropped() -> None:
    bench = Bench()
    bench.greet()
    assert bench.tell(boot=6, epoch=90) == []
    assert bench.c.board.permission == Permission(7, 20)


def test_readings_come_once_and_in_order() -> None:
    bench = Bench()
    bench.greet()
    reading = Reading(ticks=3000, count=7, value=1, window=200, celsius=2000, flags=0)
    assert bench.hear(reading) == [reading]
    assert bench.hear(reading) == []
    assert bench.hear(replace(reading, ticks=2800)) == []


# ---------------------------------------------------------------- refusals


@pytest.mark.parametrize("why", list(Refusal))
def test_a_refused_command_is_a_fact_and_is_not_hammered(why: Refusal) -> None:
    bench = Bench()
    bench.greet()
    wants = Wants(sampling=Sampling(200, 250))
    command = only(bench.advance(wants))
    assert [type(message).__name__ for message in bench.refuse(command, why)] == ["Refused"]
    sent = [message for _ in range(10) for message in bench.advance(wants, 0.004)]
    if why in (Refusal.SEQUENCE, Refusal.NOT_GREETED):
        assert [type(message) for message in sent] == [Greet]
    else:
        assert sent == []
    bench.tell()
    sent = bench.advance(wants)
    if why in (Refusal.STALE, Refusal.QUEUE_FULL, Refusal.GAP):
        assert sent == [command]  # looked at again with fresh eyes
    else:
        assert sent == []
    if why not in (Refusal.SEQUENCE, Refusal.NOT_GREETED, Refusal.STALE, Refusal.QUEUE_FULL, Refusal.GAP):
        bench.tell(inputs=AT_REST | 4)  # something changed
        assert bench.advance(wants) == [command]


def test_a_stale_pace_is_said_anew_for_the_present_epoch() -> None:
    bench, wants = ready_to_go()
    faster = replace(wants, pace=4000)
    command = only(bench.advance(faster))
    bench.refuse(command, Refusal.STALE, epoch=23)
    bench.tell(epoch=23, state=State.HELD, stop_point=5000)
    assert [only(bench.advance(faster))] == [Pace(7, 23, 4000)]


def test_a_gap_is_filled_from_where_the_board_says() -> None:
    bench = Bench()
    bench.greet(program=PROGRAM.id32, next=20, executing=20, base=20)
    wants = Wants(program=PROGRAM)
    lay = only(bench.advance(wants))
    assert isinstance(lay, Lay)
    assert lay.first == 20
    bench.refuse(lay, Refusal.GAP, limit=24)
    bench.tell(next=24, executing=24, program_crc=bench.c._feed.crc(20, 24) or 0)
    lay = only(bench.advance(wants))
    assert isinstance(lay, Lay)
    assert lay.first == 24


# ---------------------------------------------------------------- the program


def test_the_board_must_hold_our_program_before_it_goes() -> None:
    bench, wants = ready_to_go()
    bench.tell(program_crc=crc(bench, 32) ^ 1)
    go = replace(wants, go=bench.permission)
    with pytest.raises(ProgramMismatch):
        for _ in range(40):
            assert bench.advance(go, 0.05) == []
            bench.tell()
    assert isinstance(only(bench.advance(Wants(hold=True))), Hold)


def test_a_sum_that_is_only_late_costs_nothing_but_time() -> None:
    bench, wants = ready_to_go()
    bench.tell(next=24, program_crc=crc(bench, 24))
    go = replace(wants, go=bench.permission)
    lay = only(bench.advance(go))
    assert isinstance(lay, Lay)  # laid once more, which is harmless
    bench.accept(lay)
    assert bench.advance(go) == []  # the last Status does not show it yet
    bench.tell(next=32, program_crc=crc(bench, 32))
    assert bench.advance(go) == [Go(7, 21)]


def test_a_board_that_goes_on_with_its_program_is_compared_from_its_base() -> None:
    part = crc_hqx(PROGRAM.packed[4 * 10 : 4 * 30], 0xFFFF)
    for good in (True, False):
        bench = Bench()
        bench.greet(
            program=PROGRAM.id32, base=10, next=30, executing=25, program_crc=part if good else part ^ 4
        )
        sent = bench.advance(Wants(program=PROGRAM))
        assert [type(message) for message in sent] == ([Lay] if good else [])
        assert bench.c.board.lead_segments == 5
        assert not bench.c.board.laid_all


def test_nothing_is_laid_into_another_program() -> None:
    bench = Bench()
    bench.greet(program=5)
    assert bench.advance(Wants(program=PROGRAM)) == []


def test_while_turning_a_whole_message_is_laid_at_a_time_and_the_rest_at_the_end() -> None:
    bench, wants = ready_to_go()
    go = replace(wants, go=bench.permission)
    bench.accept(only(bench.advance(go)))
    firsts: list[tuple[int, int]] = []
    for executing in range(100):
        laid = bench.c.board.next
        bench.tell(state=State.TURNING, executing=executing, next=laid, program_crc=crc(bench, laid))
        for lay in lay_all(bench, go):
            firsts.append((lay.first, lay.n))
            assert lay.first + lay.n - executing <= 32
            assert lay.segments[: 4 * lay.n] == PROGRAM.packed[4 * lay.first : 4 * (lay.first + lay.n)]
    assert firsts == [(32, 12), (44, 12), (56, 12), (68, 12), (80, 12), (92, 8)]
    assert bench.c.advance(go, bench.now) == b""
    assert bench.c.board.laid_all


def test_a_new_stop_point_does_not_wait_behind_the_program_while_the_queue_is_well_filled() -> None:
    bench, wants = ready_to_go()
    go = replace(wants, go=bench.permission)
    bench.accept(only(bench.advance(go)))
    bench.tell(state=State.TURNING, executing=13, next=32, program_crc=crc(bench, 32))
    assert isinstance(only(bench.advance(replace(go, stop_point=4000))), StopAt)
    bench.accept(StopAt(7, 21, 4000))
    bench.tell(executing=20)
    assert isinstance(only(bench.advance(replace(go, stop_point=3000))), Lay)


def test_an_adjusted_stop_point_is_not_argued_about() -> None:
    bench, wants = ready_to_go()
    go = replace(wants, go=bench.permission)
    bench.accept(only(bench.advance(go)))
    bench.tell(state=State.TURNING, stop_point=5000)
    earlier = replace(go, stop_point=100)
    assert only(bench.advance(earlier)) == StopAt(7, 21, 100)
    bench.accept(StopAt(7, 21, 100), value=260)
    for _ in range(5):
        bench.tell(stop_point=260)
        assert bench.advance(earlier) == []


# ---------------------------------------------------------------- beats, time, bytes


def test_beats_come_twice_a_second_and_only_while_wanted() -> None:
    bench = Bench()
    bench.greet()
    beats = 0
    for _ in range(200):
        bench.tell()
        beats += sum(isinstance(message, Beat) for message in bench.advance(Wants(beat=True), 0.01))
    assert beats == 4
    assert bench.advance(NOTHING, 1.0) == []


def test_a_beat_goes_before_each_word_that_lets_a_motor_turn() -> None:
    bench, wants = ready_to_go()
    beating = replace(wants, go=bench.permission, beat=True)
    assert Beat() in bench.advance(replace(wants, beat=True))
    assert bench.advance(beating, 0.1) == [Beat(), Go(7, 21)]  # the next one by itself is due in 0.4 s
    assert bench.advance(beating, 0.26) == [Beat(), Go(7, 21)]  # not answered, said again
    assert bench.advance(beating, 0.1) == []


def test_next_due_is_when_there_is_something_to_say() -> None:
    bench = Bench()
    assert bench.c.next_due(bench.now) == bench.now
    bench.advance(NOTHING)
    assert bench.c.next_due(bench.now) == pytest.approx(bench.now + 0.25)
    bench.now = 50.0
    bench = Bench()
    bench.greet()
    bench.advance(Wants(beat=True))
    assert bench.c.next_due(bench.now) == pytest.approx(bench.now + 0.5)
    bench.advance(Wants(beat=True, hold=True), 0.1)
    assert bench.c.next_due(bench.now) == pytest.approx(bench.now + 0.05)


@pytest.mark.parametrize("cut", [1, 7, 1000])
def test_how_the_bytes_are_cut_makes_no_difference(cut: int) -> None:
    bench = Bench()
    greet = only(bench.advance(NOTHING))
    assert isinstance(greet, Greet)
    stream = b"\xff junk \0" + encode(Beat.CODE, 3, b"")  # and an echo
    words: list[BoardMessage] = [
        replace(IDENTITY, nonce=greet.nonce),
        replace(bench.status, ticks=1),
        replace(bench.status, ticks=2),
    ]
    stream += b"".join(encode(word.CODE, 0, word.encode_body()) for word in words) + b"\x05half"
    heard = [
        message
        for at in range(0, len(stream), cut)
        for message in bench.c.receive(stream[at : at + cut], bench.now)
    ]
    assert heard == words
    assert bench.c.counters.bad == 2


def test_a_greeting_after_hold_was_wanted_first_still_clears_the_hold() -> None:
    bench = Bench()
    hold, greet = bench.advance(Wants(hold=True))
    assert isinstance(hold, Hold)
    assert isinstance(greet, Greet)
    bench.greeted(greet)
    assert bench.advance(Wants(hold=True), 0.06) == []
