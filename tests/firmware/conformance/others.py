"""Sections 10 and 11: boards without a drive, and what a host needs to go on."""

from __future__ import annotations

from binascii import crc_hqx

from tests.firmware.conformance.clause import clause, must
from tests.firmware.conformance.hands import Act
from tests.firmware.conformance.rig import PROGRAM, Rig, named
from windctl.protocol import messages as m
from windctl.protocol.frames import CRC_START
from windctl.protocol.messages import Capability, Cause, NoticeKind, State

DRIVE = Capability.DRIVE_STEP


@clause(10, "", "counting without a drive: hand_stop_due at the stop point, then held", hand=True)
def by_hand(rig: Rig) -> str:
    turn = rig.machine.counts_per_turn
    rig.ready(fitted=0)
    rig.accept(m.StopAt(*rig.permission, turn))
    rig.accept(m.Go(*rig.permission))
    must(rig.fresh_status().state == State.TURNING, "not turning after Go on a board without a drive")
    begun = rig.mark()
    rig.please(Act.TURN_FORWARD, lambda: rig.status.count >= turn)
    stood = rig.settle()
    due = [n for n in rig.since(begun, m.Notice) if n.kind == NoticeKind.HAND_STOP_DUE]
    must(len(due) == 1, f"{len(due)} Notices hand_stop_due; expected: one")
    must(
        turn <= due[0].a <= turn + max(2, turn // 8), f"hand_stop_due at {due[0].a}; the stop point is {turn}"
    )
    must((stood.state, stood.cause) == (State.HELD, Cause.STOP_POINT), f"{stood}")
    return f"due at {due[0].a}, stood at {stood.count}"


@clause(10, "", "a stop point that is passed already is moved to the count, and due at once", hand=True)
def passed(rig: Rig) -> None:
    turn = rig.machine.counts_per_turn
    rig.ready(fitted=0)
    rig.accept(m.StopAt(*rig.permission, 50 * turn))
    rig.accept(m.Go(*rig.permission))
    rig.please(Act.TURN_FORWARD, lambda: rig.status.count >= turn)
    begun = rig.mark()
    answer = rig.accept(m.StopAt(*rig.permission, turn // 2))
    must(answer.value >= turn, f"moved to {answer.value}; the count is at least {turn}")
    rig.listen(0.1)
    due = [n for n in rig.since(begun, m.Notice) if n.kind == NoticeKind.HAND_STOP_DUE]
    must(len(due) == 1, f"{len(due)} Notices hand_stop_due; expected: one, at once")
    rig.settle()


@clause(11, "", "after silence the place is kept: what Identity tells", needs=DRIVE, moves=True)
def kept(rig: Rig) -> str:
    mine = rig.turning(turns=400)
    rig.beating = False
    rig.wait_for(m.Status, 4.0, suits=lambda s: s.state == State.HELD)
    stood = rig.settle()
    rig.beating = True
    seen = rig.greet()
    crc = crc_hqx(mine.encode_body(), CRC_START)
    for what, got, wanted in (
        ("coil_token", seen.coil_token, mine.coil_token),
        ("setup_crc", seen.setup_crc, crc),
        ("program", seen.program, PROGRAM),
        ("trust", seen.trust, 3),
        ("count", seen.count, stood.count),
        ("guide", seen.guide, stood.guide),
        ("state", seen.state, State.HELD),
    ):
        must(got == wanted, f"{what} {got}; expected: {wanted}")
    rig.accept(m.Go(*rig.permission))
    must(rig.listen(5.0, lambda: rig.status.count > stood.count), "it did not go on")
    rig.hold()
    rig.settle()
    return f"count {seen.count}"


@clause(11, "", "turns by hand with the drives off are counted", hand=True)
def hand_turns(rig: Rig) -> str:
    turn = rig.machine.counts_per_turn
    rig.fresh()
    rig.place(count=10 * turn)
    rig.please(Act.TURN_FORWARD, lambda: rig.status.count >= 11 * turn)
    up = rig.settle().count
    if turn >= 4:
        rig.please(Act.TURN_BACK, lambda: rig.status.count <= up - turn // 4)
    down = rig.settle()
    must(down.state == State.DRIVES_OFF, f"{named(State, down.state)} after turns by hand")
    must(down.trust == 3, f"trust {down.trust} after turns by hand")
    return f"{10 * turn}, {up}, {down.count}"
