"""Section 7: the queue, the guide's line, GuideTo."""

from __future__ import annotations

import struct
from binascii import crc_hqx
from itertools import accumulate

from tests.firmware.conformance.clause import clause, must
from tests.firmware.conformance.hands import Act
from tests.firmware.conformance.rig import PROGRAM, Rig, named
from windctl.protocol import messages as m
from windctl.protocol.frames import CRC_START
from windctl.protocol.messages import Capability, Cause, Refusal, State, Trip, Trust

GUIDE = Capability.GUIDE_STEP
BOTH = GUIDE | Capability.DRIVE_STEP

# Counts and guide steps with every kind of rounding in them.
SEGMENTS = (
    (7, 3), (50, -17), (33, 33), (101, -1), (64, 0), (40, -39), (97, 41), (13, -13), (2, 1), (3, -1),
    (200, 99),
)  # fmt: skip


def place(segments: tuple[tuple[int, int], ...], count: int) -> int:
    """Guide steps after so many counts, by the formula of section 7."""
    guide = 0
    for counts, steps in segments:
        k = min(max(count, 0), counts)
        way = (k * abs(steps) + counts // 2) // counts
        guide += way if steps > 0 else -way
        count -= counts
    return guide


def _lay(first: int, n: int, *segments: tuple[int, int], program: int = PROGRAM) -> m.Lay:
    packed = b"".join(struct.pack("<Hh", *one) for one in segments)
    return m.Lay(program, first, n, packed.ljust(48, b"\0"))


@clause(7, "Lay", "what is refused, with which limit, and that it changes nothing", needs=GUIDE)
def lay_refusals(rig: Rig) -> None:
    rig.fresh()
    rig.place(first=7)
    rig.refuse(_lay(7, 1, (10, 1), program=PROGRAM ^ 1), Refusal.PROGRAM)
    rig.refuse(_lay(8, 1, (10, 1)), Refusal.GAP, 7)
    rig.refuse(_lay(6, 1, (10, 1)), Refusal.GAP, 7)
    rig.refuse(_lay(7, 0), Refusal.RANGE)
    rig.refuse(_lay(7, 13), Refusal.RANGE)
    rig.refuse(_lay(7, 3, (10, 1), (0, 0), (10, 1)), Refusal.SEGMENT, 1)
    rig.refuse(_lay(7, 2, (10, -10), (10, -11)), Refusal.SEGMENT, 1)
    status = rig.fresh_status()
    must(status.next == 7, f"next {status.next} after refused Lays; expected: 7")
    must(status.program_crc == CRC_START, f"program_crc {status.program_crc:#06x} with nothing laid")
    rig.accept(_lay(7, 2, (10, -10), (10, 10), (0, 0)))
    must(rig.fresh_status().next == 9, f"next {rig.status.next} after two segments from 7")


@clause(7, "Lay", "refused as not_fitted where a hand leads the guide")
def lay_by_hand(rig: Rig) -> None:
    rig.fresh(fitted=0)
    rig.place()
    rig.refuse(_lay(0, 1, (10, 1)), Refusal.NOT_FITTED)


@clause(
    7, "Lay", "the running CRC is that of the segments as on the line; a repeat changes nothing", needs=GUIDE
)
def program_crc(rig: Rig) -> None:
    rig.fresh()
    rig.place()
    packed = rig.lay(SEGMENTS)
    frame, number = rig.last_frame, rig.sequence
    rig.again(frame, number)
    status = rig.fresh_status()
    wanted = crc_hqx(packed, CRC_START)
    must(status.next == len(SEGMENTS), f"next {status.next} after {len(SEGMENTS)} segments")
    must(status.program_crc == wanted, f"program_crc {status.program_crc:#06x}; expected: {wanted:#06x}")


@clause(
    7,
    "The queue",
    "it has the places that Identity tells; one more is refused with those that are free",
    needs=GUIDE,
)
def queue(rig: Rig) -> str:
    rig.fresh()
    rig.place()
    assert rig.identity is not None
    places = rig.identity.queue
    whole = places // 12 * 12
    rig.lay([(10, 0)] * whole)
    rest = places - whole
    rig.refuse(_lay(whole, rest + 1, *[(10, 0)] * (rest + 1)), Refusal.QUEUE_FULL, rest)
    if rest:
        rig.lay([(10, 0)] * rest)
        rig.refuse(_lay(places, 1, (10, 0)), Refusal.QUEUE_FULL, 0)
    must(rig.fresh_status().next == places, f"next {rig.status.next}; expected: {places}")
    return f"{places} places"


def _follows(rig: Rig, begun: int, segments: tuple[tuple[int, int], ...], before: int = 0) -> int:
    """In every Status the guide is on its line; `before`: counts of the first segment wound already."""
    high, seen = 0, 0
    start = place(segments, before)
    for status in rig.since(begun, m.Status):
        high = max(high, status.count)
        wanted = place(segments, before + high) - start
        must(status.guide == wanted, f"guide at {status.guide} at count {high}; by the formula: {wanted}")
        seen += 1
    return seen


@clause(
    7,
    "The line",
    "at every count the guide is where the formula has it; a segment ends at exactly its steps",
    needs=BOTH,
    moves=True,
)
def line(rig: Rig) -> str:
    rig.ready()
    rig.lay(SEGMENTS)
    total = sum(counts for counts, _ in SEGMENTS)
    begun = rig.mark()
    rig.go(pace=max(20, min(rig.machine.pace, 200)))
    ends = list(accumulate(counts for counts, _ in SEGMENTS))
    status = rig.settle(60.0)
    must(status.cause == Cause.QUEUE_END, f"cause {named(Cause, status.cause)}; expected: queue_end")
    must(0 <= total - status.count <= 1 + rig.machine.dither, f"stands at {status.count} of {total}")
    seen = _follows(rig, begun, SEGMENTS)
    must(
        status.executing == status.next or status.count < ends[-1], f"executing {status.executing} at the end"
    )
    return f"{seen} points over {total} counts"


@clause(7, "SetDatum", "of the next segment so many counts are wound already", needs=BOTH, moves=True)
def into(rig: Rig) -> str:
    rig.fresh()
    rig.place(first=4, into=21)
    rig.refuse(_lay(4, 1, (21, 3)), Refusal.SEGMENT, 0)
    rig.arm()
    segments = ((60, 35), (45, -11), (80, 7))
    rig._laid = 4
    rig.lay(segments)
    begun = rig.mark()
    rig.go(pace=max(20, min(rig.machine.pace, 100)))
    status = rig.settle(60.0)
    must(status.cause == Cause.QUEUE_END, f"cause {named(Cause, status.cause)}; expected: queue_end")
    must(
        abs(status.count - (185 - 21)) <= 1 + rig.machine.dither,
        f"stands at {status.count}; the queue ends at 164",
    )
    return f"{_follows(rig, begun, segments, 21)} points"


@clause(
    7,
    "The line",
    "segments that come in time move the end of the queue on without standing",
    needs=BOTH,
    moves=True,
)
def in_time(rig: Rig) -> None:
    turn = rig.machine.counts_per_turn
    rig.ready()
    rig.lay([(turn, 5), (turn, 5), (turn, -5)])
    rig.go()
    begun = rig.mark()
    rig.listen(10.0, lambda: rig.status.count > turn)
    rig.lay([(turn, -5), (turn, 0)])
    rig.listen(20.0, lambda: rig.status.count > 4 * turn)
    speeds = [s.speed for s in rig.since(begun, m.Status)]
    must(min(speeds[2:]) > 0, "it stood although segments came in time")
    status = rig.settle(30.0)
    must(status.cause == Cause.QUEUE_END and status.guide == 0, f"{status}")


@clause(
    7,
    "The line",
    "unwinding takes no guide step back, and winding again gives none twice",
    needs=BOTH,
    moves=True,
    hand=True,
)
def unwinding(rig: Rig) -> None:
    turn = rig.machine.counts_per_turn
    rig.ready()
    rig.lay([(turn, turn // 8), (2 * turn, turn // 8)])
    rig.go(turn)
    stood = rig.settle(20.0)
    rig.accept(m.Disarm())
    rig.please(Act.TURN_BACK, lambda: rig.status.count <= stood.count - turn // 4)
    back = rig.settle()
    must(back.guide == stood.guide, f"the guide went from {stood.guide} to {back.guide} while unwinding")
    rig.arm()
    rig.go(turn)
    again = rig.settle(20.0)
    must(again.guide == stood.guide, f"guide at {again.guide} after winding again; before: {stood.guide}")


@clause(7, "The line", "a step beyond Setup's limits is not made: trip guide_limit", needs=BOTH, moves=True)
def guide_limit(rig: Rig) -> None:
    rig.ready(guide_min=-20, guide_max=20)
    turn = rig.machine.counts_per_turn
    steps = min(60, turn)
    rig.lay([(turn, steps), (turn, 0)])
    rig.go()
    status = rig.wait_for(m.Status, 10.0, suits=lambda s: s.state == State.TRIPPED)
    must(status.trip == Trip.GUIDE_LIMIT, f"trip {named(Trip, status.trip)}; expected: guide_limit")
    stood = rig.settle()
    must(stood.guide == 20, f"guide at {stood.guide}; the limit is 20")
    must(stood.trust == Trust.COUNT, f"trust {stood.trust} after guide_limit; expected: the count alone")


@clause(
    7, "GuideTo", "goes there at its pace, and Go wants the guide back at its place", needs=BOTH, moves=True
)
def guide_to(rig: Rig) -> str:
    mine = rig.ready()
    rig.lay([(rig.machine.counts_per_turn, 0)])
    for guide, limit in ((mine.guide_max + 1, mine.guide_max), (mine.guide_min - 1, mine.guide_min)):
        rig.refuse(m.GuideTo(*rig.permission, guide, 100), Refusal.RANGE, limit)
    rig.refuse(m.GuideTo(*rig.permission, 10, 0), Refusal.RANGE, 1)
    rig.refuse(m.GuideTo(*rig.permission, 10, 4001), Refusal.RANGE, 4000)
    span = min(mine.guide_max, 200)
    begun = rig.mark()
    rig.accept(m.GuideTo(*rig.permission, span, 200))
    rig.listen(0.1)
    rig.refuse(m.GuideTo(*rig.permission, 0, 200), Refusal.MOVING)
    there = rig.settle(10.0)
    must(there.guide == span, f"guide at {there.guide}; expected: {span}")
    on_way = [s for s in rig.since(begun, m.Status) if 0 < s.guide < span]
    rate = 1000.0 * (on_way[-1].guide - on_way[0].guide) / (on_way[-1].ticks - on_way[0].ticks)
    must(abs(rate - 200.0) <= 10.0, f"{rate:.0f} guide steps/s; expected: 200")
    rig.accept(m.Pace(*rig.permission, rig.machine.pace))
    rig.refuse(m.Go(*rig.permission), Refusal.RANGE, 0)
    rig.accept(m.GuideTo(*rig.permission, 0, 400))
    must(rig.settle(10.0).guide == 0, "the guide did not come back")
    return f"{rate:.0f} guide steps/s"


@clause(7, "GuideTo", "Hold ends it where it is", needs=GUIDE, moves=True)
def guide_held(rig: Rig) -> None:
    rig.ready()
    rig.accept(m.GuideTo(*rig.permission, rig.machine.guide_span, 100))
    rig.listen(0.15)
    rig.hold()
    stood = rig.settle()
    must(0 < stood.guide < rig.machine.guide_span, f"guide at {stood.guide} after a Hold on its way")
    rig.listen(0.3)
    must(rig.fresh_status().guide == stood.guide, "the guide went on after a Hold")


@clause(7, "GuideTo", "refused as not_fitted where a hand leads the guide")
def guide_by_hand(rig: Rig) -> None:
    rig.ready(fitted=0)
    rig.refuse(m.GuideTo(*rig.permission, 0, 100), Refusal.NOT_FITTED)
