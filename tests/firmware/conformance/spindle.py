"""Section 6: target, pace, braking, settling, stop points."""

from __future__ import annotations

import itertools
import math

from tests.firmware.conformance.clause import NotJudgedError, clause, must
from tests.firmware.conformance.rig import NO_STOP_POINT, Rig, named
from windctl.protocol import messages as m
from windctl.protocol.messages import Capability, Cause, Refusal, State

DRIVE = Capability.DRIVE_STEP


def _stands_at(rig: Rig, target: int, cause: Cause) -> m.Status:
    """Held at the target: never beyond, less than one step before it."""
    status = rig.settle(30.0)
    must(status.state == State.HELD, f"{named(State, status.state)} at the end")
    must(status.cause == cause, f"cause {named(Cause, status.cause)}; expected: {cause.name.lower()}")
    machine = rig.machine
    short, dither = target - status.count, machine.dither
    must(short >= -dither, f"passed the target {target} by {-short} counts")
    must(
        (short - dither) * machine.steps_per_turn < machine.counts_per_turn,
        f"stands {short} counts before the target {target}: a step or more",
    )
    return status


@clause(
    6, "Target", "stands at the stop point within less than a step, never beyond", needs=DRIVE, moves=True
)
def stop_point(rig: Rig) -> str:
    rig.ready(fitted=int(DRIVE))
    turn = rig.machine.counts_per_turn
    at, stands = 0, []
    for turns in (1, 2.5, 0.1, 1.333):
        at += max(2, round(turns * turn))
        rig.go(at)
        stands.append(_stands_at(rig, at, Cause.STOP_POINT).count - at)
    return f"counts beside the target: {stands}"


@clause(
    6,
    "Target",
    "the hard limit is never passed; an equal stop point is named before it",
    needs=DRIVE,
    moves=True,
)
def hard_limit(rig: Rig) -> None:
    turn = rig.machine.counts_per_turn
    rig.ready(fitted=int(DRIVE), max_count=turn)
    rig.refuse(m.StopAt(*rig.permission, turn + 1), Refusal.RANGE, turn)
    rig.go()
    _stands_at(rig, turn, Cause.MAX_COUNT)
    rig.ready(fitted=int(DRIVE), max_count=turn)
    rig.go(turn)
    _stands_at(rig, turn, Cause.STOP_POINT)


@clause(6, "Target", "a later stop point in time is gone on to without standing", needs=DRIVE, moves=True)
def later_stop_point(rig: Rig) -> None:
    turn = rig.machine.counts_per_turn
    rig.ready(fitted=int(DRIVE))
    rig.go(3 * turn)
    begun = rig.mark()
    rig.listen(10.0, lambda: rig.status.count >= turn)
    rig.accept(m.StopAt(*rig.permission, 5 * turn))
    rig.listen(10.0, lambda: rig.status.count >= 4 * turn)
    speeds = [s.speed for s in rig.since(begun, m.Status)]
    must(min(speeds[2:-1]) > 0, "it stood on its way to a later stop point")
    _stands_at(rig, 5 * turn, Cause.STOP_POINT)


@clause(
    6,
    "Target",
    "what comes after the last step to a target does not go on: Go is needed",
    needs=DRIVE,
    moves=True,
)
def too_late(rig: Rig) -> None:
    turn = rig.machine.counts_per_turn
    rig.ready(fitted=int(DRIVE))
    rig.go(turn)
    _stands_at(rig, turn, Cause.STOP_POINT)
    rig.accept(m.StopAt(*rig.permission, 2 * turn))
    rig.listen(0.5)
    must(rig.fresh_status().count <= turn + rig.machine.dither, "a stop point alone started it")
    rig.accept(m.Go(*rig.permission))
    _stands_at(rig, 2 * turn, Cause.STOP_POINT)


@clause(6, "Pace", "refused as range below 1 and above Setup's", needs=DRIVE)
def pace_bounds(rig: Rig) -> None:
    mine = rig.ready(fitted=int(DRIVE))
    rig.refuse(m.Pace(*rig.permission, mine.max_pace + 1), Refusal.RANGE, mine.max_pace)
    rig.refuse(m.Pace(*rig.permission, 0), Refusal.RANGE, 1)
    rig.accept(m.Pace(*rig.permission, mine.max_pace))


def _slope(speeds: list[m.Status], rate: int, what: str) -> int:
    """Between every two of these, the speed changes by `rate` steps/s2, within one step/s."""
    for before, after in itertools.pairwise(speeds):
        ticks = after.ticks - before.ticks
        due = rate * ticks / 1000.0
        got = after.speed - before.speed
        must(abs(got - due) <= 1.0, f"{what}: {got} steps/s in {ticks} ticks; expected: {due:.1f}")
    return len(speeds)


@clause(
    6,
    "Pace",
    "goes faster with accel and slower with decel, in whole steps per second",
    needs=DRIVE,
    moves=True,
)
def ramps(rig: Rig) -> str:
    machine = rig.machine
    rig.ready(fitted=int(DRIVE))
    begun = rig.mark()
    rig.go(500 * machine.counts_per_turn)
    rig.at_pace()
    up = [s for s in rig.since(begun, m.Status) if 0 < s.speed < machine.pace]
    begun = rig.mark()
    slow = max(1, machine.pace // 4)
    rig.accept(m.Pace(*rig.permission, slow))
    rig.at_pace(slow)
    down = [s for s in rig.since(begun, m.Status) if slow < s.speed < machine.pace]
    if len(up) < 2 and len(down) < 2:
        raise NotJudgedError("the ramps are too short for two Status: give a higher --rpm")
    done = _slope(up, machine.accel, "accelerating") + _slope(down, -machine.decel, "slowing down")
    return f"{done} points on the ramps"


@clause(6, "Braking", "v*v never exceeds 2*decel*left on the way to the target", needs=DRIVE, moves=True)
def braking(rig: Rig) -> str:
    machine = rig.machine
    rig.ready(fitted=int(DRIVE))
    # nearly all of the way is braking
    steps = machine.pace**2 // (2 * machine.decel) + machine.pace**2 // (2 * machine.accel) + 20
    target = steps * machine.counts_per_turn // machine.steps_per_turn
    begun = rig.mark()
    rig.go(target)
    _stands_at(rig, target, Cause.STOP_POINT)
    seen = [s for s in rig.since(begun, m.Status) if s.speed]
    tick = 0.001
    peak = max(s.ticks for s in seen if s.speed == max(one.speed for one in seen))

    def least(left: float) -> float:
        """Braking as late as it may, but for what is under way and not counted yet."""
        late = machine.pace * 0.002 + machine.steps_per_turn / machine.counts_per_turn + machine.dither + 2
        return 0.85 * math.sqrt(2 * machine.decel * max(0.0, left - late)) - 2

    for s in seen:
        left = (target - s.count) * machine.steps_per_turn / machine.counts_per_turn
        # the slowing of the tick in which the limit is met, and the step that is under way
        most = math.sqrt(2 * machine.decel * (left + 1 + machine.dither)) + machine.decel * tick + 1
        must(s.speed <= most, f"{s.speed} steps/s with {left:.0f} steps left; at most {most:.0f}")
        must(
            s.speed >= least(left) or s.ticks <= peak, f"{s.speed} steps/s with {left:.0f} left: brakes early"
        )
    must(len(seen) >= 3, f"{len(seen)} Status on the way")
    return f"{len(seen)} points"


@clause(
    6,
    "Left",
    "steps under way are no overshoot: every start and stop ends within a step",
    needs=DRIVE,
    moves=True,
)
def left(rig: Rig) -> None:
    rig.ready(fitted=int(DRIVE))
    at = 0
    machine = rig.machine
    step = max(2, 2 * machine.counts_per_turn // machine.steps_per_turn + 1)
    for counts in (step, step + 1, step + 2, 7 * step, 23 * step):
        at += counts
        rig.go(at)
        _stands_at(rig, at, Cause.STOP_POINT)


@clause(6, "Settling", "counts that were lost on the way are made up for at a creep", needs=DRIVE, moves=True)
def settling(rig: Rig) -> str:
    """The steps of a turn are said to be fewer than they are, so that some are missing at the end."""
    machine = rig.machine
    said = machine.steps_per_turn * 19 // 20
    if said == machine.steps_per_turn:
        raise NotJudgedError("too few steps per turn")
    rig.ready(fitted=int(DRIVE), steps_per_turn=said, slip_counts=0xFFFF)
    begun = rig.mark()
    turn = machine.counts_per_turn
    rig.go(2 * turn)
    status = rig.settle(30.0)
    must(status.state == State.HELD and status.cause == Cause.STOP_POINT, f"{status}")
    must(abs(2 * turn - status.count) <= max(1, turn // said) + machine.dither, f"stands at {status.count}")
    creep = math.isqrt(8 * machine.decel)
    speeds = [s.speed for s in rig.since(begun, m.Status) if s.state == State.TURNING]
    moving = next((at for at, speed in enumerate(speeds) if speed), len(speeds))
    stood = next((at for at, speed in enumerate(speeds[moving:], moving) if not speed), len(speeds))
    late = [speed for speed in speeds[stood:] if speed]
    must(bool(late), "nothing was made up for after it first stood")
    must(max(late) <= creep, f"made up for at up to {max(late)} steps/s; the creep is {creep}")
    return f"creep at most {creep} steps/s"


@clause(
    6,
    "Stop points",
    "one too near is moved to the nearest that can be reached, and told",
    needs=DRIVE,
    moves=True,
)
def stop_now(rig: Rig) -> str:
    machine = rig.machine
    rig.turning()
    answer = rig.accept(m.StopAt(*rig.permission, rig.status.count + 1))
    status = rig.fresh_status()
    must(status.stop_point == answer.value, f"Status tells {status.stop_point}, Accepted {answer.value}")
    v = machine.pace
    steps = -(-v * v // (2 * machine.decel)) + v // 1000 + 2
    most = -(-steps * machine.counts_per_turn // machine.steps_per_turn)
    # the steps under way count besides: at least as many as a count is apart from its step
    under_way = max(2, machine.counts_per_turn // 20) + machine.dither
    way = answer.value - status.count
    must(way <= most + under_way, f"{way} counts to go; the braking distance is {most}")
    stood = rig.settle()
    _stands_at(rig, answer.value, Cause.STOP_POINT)
    return f"told {answer.value}, stands at {stood.count}"


@clause(6, "Stop points", "refused as range behind the count, at rest", needs=DRIVE)
def stop_behind(rig: Rig) -> None:
    rig.fresh(fitted=int(DRIVE))
    rig.place(count=500)
    rig.arm()
    rig.refuse(m.StopAt(*rig.permission, 499), Refusal.RANGE, 500)
    rig.accept(m.StopAt(*rig.permission, 500))
    rig.accept(m.StopAt(*rig.permission, NO_STOP_POINT))


@clause(
    6,
    "Hold, silence, trips",
    "brake with decel from the present pace until they stand",
    needs=DRIVE,
    moves=True,
)
def hold_brakes(rig: Rig) -> str:
    machine = rig.machine
    rig.turning()
    begun = rig.mark()
    rig.hold()
    rig.wait_for(m.Status, 0.3, suits=lambda s: s.state == State.HELD)
    first = rig.since(begun, m.Status)
    held = next(s for s in first if s.state == State.HELD)
    must(held.cause == Cause.HOLD, f"cause {named(Cause, held.cause)}; expected: hold")
    stood = rig.settle()
    slowing = [s for s in rig.since(begun, m.Status) if s.state == State.HELD and s.speed]
    _slope(slowing, -machine.decel, "after a Hold")
    steps = machine.pace**2 / (2 * machine.decel)
    counts = steps * machine.counts_per_turn / machine.steps_per_turn
    way = stood.count - held.count
    slack = 3 + 0.05 * counts + machine.pace * 0.002 + machine.dither
    must(way <= counts + slack, f"stands {way} counts after the Hold; braking takes {counts:.0f}")
    return f"{way} counts, v*v/(2a) is {counts:.0f}"
