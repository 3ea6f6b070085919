"""Section 9: trips, pedal, silence. What can be provoked by a Setup that says untrue things needs no hand."""

from __future__ import annotations

from tests.firmware.conformance.clause import NotJudgedError, clause, must
from tests.firmware.conformance.hands import Act
from tests.firmware.conformance.rig import NO_STOP_POINT, Rig, named
from windctl.protocol import messages as m
from windctl.protocol.messages import (
    TRIPS,
    Capability,
    Cause,
    InputBit,
    NoticeKind,
    Refusal,
    State,
    Trip,
    Trust,
)

DRIVE = Capability.DRIVE_STEP
SILENCE_TICKS = 2000


def _tripped(rig: Rig, trip: Trip, seconds: float, begun: int) -> m.Status:
    """The board trips, tells so at once by both messages, and leaves the trust that the table says."""
    status = rig.wait_for(m.Status, seconds, suits=lambda s: s.state == State.TRIPPED)
    rig.listen(0.05)
    must(status.trip == trip, f"trip {named(Trip, status.trip)}; expected: {trip.name.lower()}")
    must(status.cause == Cause.TRIP, f"cause {named(Cause, status.cause)}; expected: trip")
    told = [n for n in rig.since(begun, m.Notice) if n.kind == NoticeKind.TRIPPED]
    must(len(told) == 1 and told[0].a == trip, f"Notices tripped: {told}")
    must(told[0].ticks == status.ticks, f"Notice at tick {told[0].ticks}, Status at {status.ticks}")
    rule = TRIPS[trip]
    wanted = (Trust.COUNT if rule.count else 0) | (Trust.GUIDE if rule.guide else 0)
    stood = rig.settle()
    must(stood.trust == wanted, f"trust {stood.trust} after {trip.name.lower()}; by the table: {int(wanted)}")
    must(stood.state == State.TRIPPED, "the trip did not last")
    return status


@clause(9, "", "slip: counts that do not come with the steps", needs=DRIVE, moves=True)
def slip(rig: Rig) -> str:
    begun = rig.mark()
    rig.tripped()
    status = next(s for s in rig.since(begun, m.Status) if s.state == State.TRIPPED)
    must(status.trip == Trip.SLIP, f"trip {named(Trip, status.trip)}; expected: slip")
    stood = rig.settle()
    must(stood.trust == 3, f"trust {stood.trust}; by the table both are kept")
    return f"after {status.count} counts"


@clause(9, "", "overspeed: more counts than the pace allows by a quarter", needs=DRIVE, moves=True)
def overspeed(rig: Rig) -> None:
    turn = rig.machine.counts_per_turn // 2
    if turn < 2 or rig.machine.pace * 64 * turn // (1000 * rig.machine.steps_per_turn) < 4:
        raise NotJudgedError("too few counts in 64 ticks to tell: give a higher --rpm")
    rig.ready(fitted=int(DRIVE), counts_per_turn=turn, slip_counts=0xFFFF)
    begun = rig.mark()
    rig.go(1000 * turn)
    _tripped(rig, Trip.OVERSPEED, 8.0, begun)


@clause(
    9,
    "",
    "index: no pulse within a turn and a half, by a turn that is said to be shorter than it is",
    needs=DRIVE | Capability.INDEX,
    moves=True,
)
def index_missing(rig: Rig) -> None:
    machine = rig.machine
    if machine.counts_per_turn % 2 or machine.steps_per_turn % 2 or machine.counts_per_turn < 40:
        raise NotJudgedError("needs even counts per turn, at least 40")
    rig.ready(fitted=int(DRIVE | Capability.INDEX), counts_per_turn=machine.counts_per_turn // 2,
              steps_per_turn=machine.steps_per_turn // 2, slip_counts=4)  # fmt: skip
    begun = rig.mark()
    rig.go(500 * machine.counts_per_turn)
    _tripped(rig, Trip.INDEX, 15.0, begun)
    rig.clear()
    rig.arm()
    rig.refuse(m.Go(*rig.permission), Refusal.NO_DATUM, int(Trust.GUIDE))


@clause(9, "", "index: with the true turn it lasts ten turns", needs=DRIVE | Capability.INDEX, moves=True)
def index_right(rig: Rig) -> None:
    turn = rig.machine.counts_per_turn
    rig.ready(fitted=int(DRIVE | Capability.INDEX))
    rig.go(10 * turn)
    status = rig.settle(120.0)
    must(status.state == State.HELD, f"{named(State, status.state)}, trip {named(Trip, status.trip)}")


@clause(
    9,
    "",
    "tension_low: at the end of the first whole turn whose mean is below the bound",
    needs=DRIVE | Capability.TENSION,
    moves=True,
)
def tension_low(rig: Rig) -> str:
    turn = rig.machine.counts_per_turn
    rig.ready(fitted=int(DRIVE | Capability.TENSION), tension_low=0xFFFF, tension_high=0xFFFF)
    begun = rig.mark()
    rig.go(10 * turn)
    status = _tripped(rig, Trip.TENSION_LOW, 15.0, begun)
    must(
        turn <= status.count <= 2 * turn + turn // 4,
        f"tripped at count {status.count}; the turn of Go is no whole one",
    )
    return f"at {status.count / turn:.2f} turns"


@clause(
    9, "", "a trip brakes with decel, latches, and is not replaced by a later one", needs=DRIVE, moves=True
)
def latched(rig: Rig) -> None:
    first = rig.tripped()
    stood = rig.settle()
    v = first.speed
    counts = v * v / (2 * rig.machine.decel) * rig.machine.counts_per_turn / rig.machine.steps_per_turn
    slack = 4 + 0.05 * counts + v * 0.002 + rig.machine.dither
    must(
        stood.count - first.count <= counts + slack,
        f"{stood.count - first.count} counts after the trip; braking takes {counts:.0f}",
    )
    rig.hold()
    rig.greet()
    rig.listen(0.5)
    status = rig.fresh_status()
    must((status.state, status.trip) == (State.TRIPPED, Trip.SLIP), f"{status} after a Hold and a Greet")
    must(status.count - stood.count <= rig.machine.dither, "it moved after the trip")


def _gate(rig: Rig, opens: Act, closes: Act, bit: InputBit, trip: Trip) -> str:
    rig.turning()
    begun = rig.mark()
    rig.please(opens, lambda: not rig.input(bit))
    first = next((s for s in rig.since(begun, m.Status) if s.state == State.TRIPPED), None)
    must(first is not None, "the board is not tripped")
    assert first is not None
    must(first.trip == trip, f"trip {named(Trip, first.trip)}; expected: {trip.name.lower()}")
    if TRIPS[trip].category == 0:
        must(first.speed == 0, f"{first.speed} steps/s in the Status of a category 0 trip")
    stood = rig.settle()
    rig.listen(0.1)
    rig.refuse(m.ClearTrip(*rig.permission), Refusal.INPUT_OPEN)
    rig.please(closes, lambda: rig.input(bit))
    rig.listen(0.3)
    must(rig.fresh_status().state == State.TRIPPED, "an input that closes cleared the trip")
    rig.clear()
    rig.listen(0.5)
    status = rig.fresh_status()
    must(status.state == State.DRIVES_OFF, f"{named(State, status.state)} after ClearTrip")
    must(status.trust == 3, f"trust {status.trust} after {trip.name.lower()}; by the table both are kept")
    return f"stands {stood.count - first.count} counts later"


@clause(
    9,
    "",
    "guard: opened while turning it trips; closing it clears nothing",
    needs=DRIVE,
    moves=True,
    hand=True,
)
def guard(rig: Rig) -> str:
    return _gate(rig, Act.OPEN_GUARD, Act.CLOSE_GUARD, InputBit.GUARD_OK, Trip.GUARD)


@clause(9, "", "stop_input: pressed while turning the rate is 0 at once", needs=DRIVE, moves=True, hand=True)
def stop_input(rig: Rig) -> str:
    return _gate(rig, Act.PRESS_STOP, Act.RELEASE_STOP, InputBit.STOP_OK, Trip.STOP_INPUT)


@clause(9, "", "without power an open guard only shows in Status.inputs", hand=True)
def gate_without_power(rig: Rig) -> None:
    rig.fresh()
    rig.please(Act.OPEN_GUARD, lambda: not rig.input(InputBit.GUARD_OK))
    rig.listen(0.2)
    must(rig.fresh_status().state == State.DRIVES_OFF, "an open guard without power is no trip")
    rig.please(Act.CLOSE_GUARD, lambda: rig.input(InputBit.GUARD_OK))


@clause(9, "", "reverse: back by more than reverse_counts while turning", hand=True)
def reverse(rig: Rig) -> None:
    turn = rig.machine.counts_per_turn
    if turn < 4:
        raise NotJudgedError("a counter of few pulses a turn does not see the way back")
    rig.ready(fitted=0, reverse_counts=max(1, turn // 8))
    rig.accept(m.StopAt(*rig.permission, 50 * turn))
    rig.accept(m.Go(*rig.permission))
    rig.please(Act.TURN_FORWARD, lambda: rig.status.count >= turn)
    begun = rig.mark()
    rig.please(Act.TURN_BACK, lambda: any(n.kind == NoticeKind.TRIPPED for n in rig.since(begun, m.Notice)))
    rig.settle()
    must(rig.status.trip == Trip.REVERSE, f"trip {named(Trip, rig.status.trip)}; expected: reverse")


@clause(
    9,
    "Pedal",
    "a press only asks; let go while turning it holds",
    needs=DRIVE | Capability.PEDAL,
    moves=True,
    hand=True,
)
def pedal(rig: Rig) -> str:
    rig.ready(fitted=int(DRIVE | Capability.PEDAL))
    rig.accept(m.Pace(*rig.permission, rig.machine.pace))
    rig.accept(m.StopAt(*rig.permission, 500 * rig.machine.counts_per_turn))
    begun = rig.mark()
    rig.please(
        Act.PRESS_PEDAL, lambda: any(n.kind == NoticeKind.PEDAL_ASKS for n in rig.since(begun, m.Notice))
    )
    rig.listen(0.2)
    must(rig.fresh_status().state == State.READY, "a press of the pedal started it")
    rig.accept(m.Go(*rig.permission))
    rig.at_pace()
    begun = rig.mark()
    rig.please(Act.LET_PEDAL_GO, lambda: not rig.input(InputBit.PEDAL_DOWN))
    first = next(s for s in rig.since(begun, m.Status) if not s.inputs & InputBit.PEDAL_DOWN)
    must(first.state == State.HELD, f"{named(State, first.state)} with the pedal let go")
    must(first.cause == Cause.PEDAL, f"cause {named(Cause, first.cause)}; expected: pedal")
    rig.settle()
    return "held in the Status that shows it"


@clause(
    9,
    "Silence",
    "held 2000 ticks after the last Beat, other traffic or not, and ungreeted from then on",
    needs=DRIVE,
    moves=True,
)
def silence(rig: Rig) -> str:
    rig.turning()
    rig.beat()
    tick = rig.board_tick(rig.beaten_at)
    rig.beating = False
    begun = rig.mark()
    for _ in range(6):  # what else is said does not count as a Beat
        rig.ask(m.Pace(*rig.permission, rig.machine.pace))
        rig.listen(0.25)
    status = rig.wait_for(m.Status, 3.0, suits=lambda s: s.state != State.TURNING)
    must(len([s for s in rig.since(begun, m.Status) if s.state == State.TURNING]) > 20, "held too early")
    must((status.state, status.cause) == (State.HELD, Cause.SILENCE), f"{status}")
    after = status.ticks - tick
    # how near the line tells when the Beat came
    slack = 2 + 2000 * rig.machine.late_s
    must(
        abs(after - SILENCE_TICKS) <= slack,
        f"{after:.0f} ticks after the Beat; expected: 2000 within {slack:.0f}",
    )
    rig.listen(0.1)
    rig.refuse_unheard()
    stood = rig.settle()
    rig.beating = True
    rig.listen(1.0)
    must(rig.fresh_status().count - stood.count <= rig.machine.dither, "Beats alone started it again")
    rig.greet()
    must(rig.fresh_status().state == State.HELD, "a Greet after silence changed more than the greeting")
    return f"{after:.0f} ticks after the Beat"


@clause(9, "Silence", "when nothing moves silence means nothing")
def silence_at_rest(rig: Rig) -> None:
    rig.ready()
    rig.beating = False
    rig.listen(2.6)
    status = rig.fresh_status()
    must(status.state == State.READY, f"{named(State, status.state)} after silence at rest")
    rig.accept(m.StopAt(*rig.permission, NO_STOP_POINT))
