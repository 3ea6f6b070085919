"""Section 5: states, and the checks of the commands that change them."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import replace
from functools import partial

from tests.firmware.conformance.clause import clause, must
from tests.firmware.conformance.hands import Act
from tests.firmware.conformance.rig import NO_STOP_POINT, PROGRAM, Rig, named
from windctl.protocol import messages as m
from windctl.protocol.messages import Capability, InputBit, NoticeKind, Refusal, State, Trust

DRIVE = Capability.DRIVE_STEP
GUIDE = Capability.GUIDE_STEP

# Which command is taken in which state, as the table of section 5 has it.
TAKEN: dict[type[m.HostMessage], tuple[State, ...]] = {
    m.Setup: (State.DRIVES_OFF,),
    m.Arm: (State.DRIVES_OFF,),
    m.Disarm: (State.READY, State.HELD),
    m.Lay: (State.DRIVES_OFF, State.READY, State.TURNING, State.HELD),
    m.Pace: (State.READY, State.TURNING, State.HELD),
    m.StopAt: (State.READY, State.TURNING, State.HELD),
    m.Go: (State.READY, State.HELD),
    m.GuideTo: (State.READY, State.HELD),
    m.SetDatum: (State.DRIVES_OFF, State.READY, State.HELD, State.TRIPPED),
    m.Measure: tuple(State),
    m.ClearTrip: (State.TRIPPED,),
}


def _commands(rig: Rig) -> Iterable[m.HostMessage]:
    """One of each; where one is taken, a later check refuses it, or it changes nothing."""
    yield rig.setup()
    yield m.Arm(*rig.permission)
    yield m.Disarm()
    yield m.Lay(PROGRAM ^ 1, 0, 1, bytes(48))
    yield m.Pace(*rig.permission, 0)
    yield m.StopAt(*rig.permission, 0xFFFFFFFE)
    yield m.Go(*rig.permission)
    yield m.GuideTo(*rig.permission, 0x7FFFFFFF, 1)
    yield m.SetDatum(*rig.permission, PROGRAM, 0x7FFFFFFF, 0, 0, 0)
    yield m.Measure(50, 0)
    yield m.ClearTrip(*rig.permission)


def _only_taken(rig: Rig, state: State) -> int:
    """Every command that this state does not take is refused as `state`, the others not for that."""
    done = 0
    for command in _commands(rig):
        taken = state in TAKEN[type(command)]
        if taken and isinstance(command, m.Arm | m.Disarm | m.Go | m.Setup | m.ClearTrip):
            continue  # would change the state; other clauses look at these
        if taken:
            answer = rig.ask(command)
            must(
                isinstance(answer, m.Refused) and answer.why != Refusal.STATE,
                f"{command.NAME} with impossible values, {state.name.lower()}: {answer}",
            )
        else:
            rig.refuse(command, Refusal.STATE, state)
        done += 1
    return done


@clause(5, "", "which command is taken with the drives off, ready and held")
def taken_at_rest(rig: Rig) -> str:
    rig.fresh()
    done = _only_taken(rig, State.DRIVES_OFF)
    rig.place()
    rig.arm()
    done += _only_taken(rig, State.READY)
    return f"{done} commands"


@clause(5, "", "which command is taken while turning, held and tripped", needs=DRIVE, moves=True)
def taken_moving(rig: Rig) -> str:
    rig.turning()
    done = _only_taken(rig, State.TURNING)
    must(rig.fresh_status().state == State.TURNING, "a refused command ended the turning")
    rig.hold()
    rig.settle()
    done += _only_taken(rig, State.HELD)
    rig.tripped()
    rig.settle()
    done += _only_taken(rig, State.TRIPPED)
    return f"{done} commands"


@clause(5, "", "Hold with nothing turning changes neither state nor cause")
def hold_at_rest(rig: Rig) -> None:
    rig.fresh()
    steps: tuple[Callable[[], None], ...] = (lambda: None, rig.place, rig.arm)
    for prepare in steps:
        prepare()
        before = rig.fresh_status()
        rig.hold()
        rig.listen(0.1)
        after = rig.fresh_status()
        must(
            (after.state, after.cause) == (before.state, before.cause),
            f"a Hold made of {named(State, before.state)} {named(State, after.state)}",
        )


@clause(5, "Standing", "clears when counts come, sets after 50 ticks without, with a Notice", hand=True)
def standing(rig: Rig) -> str:
    rig.fresh(fitted=int(rig.capabilities & DRIVE) if rig.identity else 0)
    rig.place()
    begun = rig.mark()
    rig.please(Act.TURN_FORWARD, lambda: rig.status.count >= rig.machine.counts_per_turn)
    rig.settle()
    moving = [s for s in rig.since(begun, m.Status) if not s.inputs & InputBit.STANDING]
    must(bool(moving), "the bit standing never cleared while counts came")
    told = [n for n in rig.since(begun, m.Notice) if n.kind == NoticeKind.STANDING]
    must(bool(told), "no Notice standing")
    must(
        told[-1].a == rig.status.count, f"Notice standing tells count {told[-1].a}, Status {rig.status.count}"
    )
    return f"{len(told)} notices"


@clause(5, "Trust", "unknown after another Setup, known after SetDatum")
def trust(rig: Rig) -> None:
    mine = rig.fresh()
    must(rig.fresh_status().trust == 0, f"trust {rig.status.trust} after another Setup")
    rig.place(count=77, guide=0)
    status = rig.fresh_status()
    must(status.trust == Trust.COUNT | Trust.GUIDE, f"trust {status.trust} after SetDatum")
    must(status.count == 77, f"count {status.count} after a SetDatum to 77")
    rig.accept(mine)
    status = rig.fresh_status()
    must(status.trust == 3 and status.count == 77, "the same Setup again voided the place")
    rig.accept(rig.setup())
    status = rig.fresh_status()
    must(status.trust == 0, "another Setup left the place known")
    must(status.stop_point == NO_STOP_POINT, "another Setup left a stop point")


@clause(5, "Setup", "values out of bounds are refused as range, with the bound that is passed")
def setup_bounds(rig: Rig) -> str:
    mine = rig.fresh()
    top = 1 << 30
    cases: list[tuple[dict[str, int], int]] = [
        ({"counts_per_turn": 0}, 1),
        ({"counts_per_turn": 401}, 400),
        ({"steps_per_turn": 0}, 1),
        ({"steps_per_turn": 801}, 800),
        ({"max_count": 0}, 1),
        ({"max_count": top + 1}, top),
        ({"max_pace": 0}, 1),
        ({"max_pace": 15001, "decel": 65535}, 15000),
        ({"accel": 99}, 100),
        ({"decel": 99, "max_pace": 10}, 100),
        ({"decel": 100, "max_pace": 1001}, 1000),
        ({"guide_min": 5, "guide_max": 4}, 5),
        ({"tension_low": 9, "tension_high": 8}, 9),
        ({"rotation": 2}, 1),
    ]
    for changes, limit in cases:
        rig.refuse(replace(mine, **changes), Refusal.RANGE, limit)
    seen = rig.greet()
    must(seen.coil_token == mine.coil_token, "a refused Setup changed the one in force")
    return f"{len(cases)} bounds"


@clause(5, "Setup", "what is not fitted is refused, with what is fitted as limit")
def setup_fitted(rig: Rig) -> None:
    mine = rig.fresh()
    has = int(rig.capabilities) & 0x3F
    wrong = [bit for bit in (1, 2, 4, 8, 16, 32, 64, 128) if not has & bit]
    must(bool(wrong), "the kit found no bit that is not fitted")
    for bit in wrong:
        rig.refuse(replace(mine, fitted=has | bit), Refusal.NOT_FITTED, has)


@clause(5, "SetDatum", "bounds of count and guide; it clears the stop point")
def datum_bounds(rig: Rig) -> None:
    mine = rig.ready()
    top = 1 << 30
    rig.refuse(m.SetDatum(*rig.permission, PROGRAM, top + 1, 0, 0, 0), Refusal.RANGE, top)
    rig.refuse(m.SetDatum(*rig.permission, PROGRAM, -top - 1, 0, 0, 0), Refusal.RANGE, -top)
    if rig.capabilities & GUIDE:
        for guide, limit in ((mine.guide_max + 1, mine.guide_max), (mine.guide_min - 1, mine.guide_min)):
            rig.refuse(m.SetDatum(*rig.permission, PROGRAM, 0, guide, 0, 0), Refusal.RANGE, limit)
    rig.accept(m.StopAt(*rig.permission, 1000))
    must(rig.fresh_status().stop_point == 1000, "Status does not tell the stop point")
    rig.accept(m.SetDatum(*rig.permission, PROGRAM, -5, 0, 0, 0))
    status = rig.fresh_status()
    must(status.stop_point == NO_STOP_POINT, "SetDatum left the stop point")
    must(status.count == -5, f"count {status.count} after a SetDatum to -5")


def _shows(rig: Rig, bit: InputBit, on: bool) -> bool:
    return rig.input(bit) is on


@clause(5, "Arm", "refused as input_open with the guard or the hardware stop open", hand=True)
def arm_open(rig: Rig) -> None:
    rig.fresh()
    rig.place()
    for opens, closes, bit in (
        (Act.OPEN_GUARD, Act.CLOSE_GUARD, InputBit.GUARD_OK),
        (Act.PRESS_STOP, Act.RELEASE_STOP, InputBit.STOP_OK),
    ):
        rig.please(opens, partial(_shows, rig, bit, False))
        must(rig.fresh_status().state == State.DRIVES_OFF, "an input that opens without power is no trip")
        rig.refuse(m.Arm(*rig.permission), Refusal.INPUT_OPEN)
        rig.please(closes, partial(_shows, rig, bit, True))
        must(rig.fresh_status().state == State.DRIVES_OFF, "an input that closes changed the state")
    rig.arm()


@clause(5, "Arm", "refused as pedal_down with a fitted pedal pressed", needs=Capability.PEDAL, hand=True)
def arm_pedal(rig: Rig) -> None:
    rig.fresh(fitted=int(rig.capabilities & (DRIVE | Capability.PEDAL)))
    rig.place()
    rig.please(Act.PRESS_PEDAL, lambda: rig.input(InputBit.PEDAL_DOWN))
    rig.refuse(m.Arm(*rig.permission), Refusal.PEDAL_DOWN)
    rig.please(Act.LET_PEDAL_GO, lambda: not rig.input(InputBit.PEDAL_DOWN))
    rig.arm()


@clause(5, "Disarm", "refused as moving while the spindle still brakes", needs=DRIVE, moves=True)
def disarm_moving(rig: Rig) -> None:
    rig.turning()
    rig.hold()
    rig.refuse(m.Disarm(), Refusal.MOVING)
    rig.refuse(m.Go(*rig.wait_permission()), Refusal.MOVING)
    rig.settle()
    rig.accept(m.Disarm())
    status = rig.fresh_status()
    must((status.state, status.cause) == (State.DRIVES_OFF, m.Cause.DISARM), f"{status} after Disarm")


@clause(5, "Go", "refused as no_datum, without a pace, and with nothing left to the target", needs=DRIVE)
def go_checks(rig: Rig) -> None:
    rig.fresh(fitted=int(DRIVE))
    rig.arm()
    rig.refuse(m.Go(*rig.permission), Refusal.NO_DATUM)
    rig.place(count=10)
    rig.refuse(m.Go(*rig.permission), Refusal.RANGE, 1)
    rig.accept(m.Pace(*rig.permission, rig.machine.pace))
    rig.accept(m.StopAt(*rig.permission, 10))
    rig.refuse(m.Go(*rig.permission), Refusal.RANGE, 10)
    must(rig.fresh_status().state == State.READY, "a refused Go changed the state")


@clause(
    5,
    "Go",
    "with a pedal: refused as pedal_up, and as pedal_down unless pressed afresh",
    needs=Capability.PEDAL | DRIVE,
    hand=True,
)
def go_pedal(rig: Rig) -> None:
    rig.ready(fitted=int(DRIVE | Capability.PEDAL))
    rig.accept(m.Pace(*rig.permission, rig.machine.pace))
    rig.accept(m.StopAt(*rig.permission, 10 * rig.machine.counts_per_turn))
    rig.refuse(m.Go(*rig.permission), Refusal.PEDAL_UP)
    rig.please(Act.PRESS_PEDAL, lambda: rig.input(InputBit.PEDAL_DOWN))
    rig.listen(0.1)
    rig.hold()  # from now on the press is an old one
    rig.listen(0.1)
    rig.refuse(m.Go(*rig.permission), Refusal.PEDAL_DOWN)
    rig.please(Act.LET_PEDAL_GO, lambda: not rig.input(InputBit.PEDAL_DOWN))


@clause(5, "ClearTrip", "refused as moving before the board stands without power", needs=DRIVE, moves=True)
def clear_moving(rig: Rig) -> None:
    rig.tripped()
    rig.refuse(m.ClearTrip(*rig.permission), Refusal.MOVING)
    rig.settle()
    rig.listen(0.1)
    rig.accept(m.ClearTrip(*rig.permission))
    status = rig.fresh_status()
    must((status.state, status.cause, status.trip) == (State.DRIVES_OFF, m.Cause.TRIP, 0), f"{status}")
    rig.listen(1.0)
    must(rig.fresh_status().state == State.DRIVES_OFF, "something happened by itself after ClearTrip")
