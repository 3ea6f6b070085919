"""Section 8: readings of the contact, and the tension's mean."""

from __future__ import annotations

import itertools

from tests.firmware.conformance.clause import clause, must
from tests.firmware.conformance.rig import Rig
from windctl.protocol import messages as m
from windctl.protocol.messages import Capability, ReadingFlag, Refusal

CONTACT = Capability.CONTACT


def _next(rig: Rig, seconds: float = 3.0) -> m.Reading:
    return rig.wait_for(m.Reading, seconds)


@clause(8, "", "Measure is refused for a window over 6000 or no multiple of 100", needs=CONTACT)
def bounds(rig: Rig) -> None:
    rig.fresh()
    rig.refuse(m.Measure(6100, 0), Refusal.RANGE)
    rig.refuse(m.Measure(150, 0), Refusal.RANGE)
    rig.accept(m.Measure(6000, 0))
    rig.accept(m.Measure(0, 0))


@clause(
    8, "", "with every = 0 there is one reading; at rest its window is the ticks asked for", needs=CONTACT
)
def one(rig: Rig) -> str:
    rig.fresh()
    rig.settle()
    begun = rig.mark()
    rig.accept(m.Measure(300, 0))
    reading = _next(rig)
    must(reading.window == 300, f"window {reading.window}; asked for: 300")
    must(not reading.flags & ReadingFlag.TURNING, "flag turning at rest")
    rig.listen(1.0)
    must(len(rig.since(begun, m.Reading)) == 1, "more than one reading with every = 0")
    assert rig.identity is not None
    return f"{reading.value / 16 * rig.identity.contact_scale / 1000:.1f} ohm"


@clause(8, "", "readings share no samples: at rest each takes window + 100 ticks", needs=CONTACT)
def no_shared(rig: Rig) -> None:
    rig.fresh()
    rig.settle()
    for window, every, period in ((100, 1, 200), (200, 50, 300), (100, 500, 500)):
        rig.accept(m.Measure(window, every))
        _next(rig)
        ticks = [_next(rig).ticks for _ in range(3)]
        for before, after in itertools.pairwise(ticks):
            must(
                after - before == period,
                f"window {window}, every {every}: one each {after - before} ticks; expected: {period}",
            )
    rig.accept(m.Measure(0, 0))


@clause(8, "", "a greeting does not end readings; a window of 0 does", needs=CONTACT)
def kept(rig: Rig) -> None:
    rig.fresh()
    rig.accept(m.Measure(100, 1))
    rig.greet()
    _next(rig)
    rig.accept(m.Measure(0, 0))
    rig.listen(0.3)
    begun = rig.mark()
    rig.listen(0.6)
    must(not rig.since(begun, m.Reading), "a reading after they were ended")


@clause(
    8,
    "",
    "while turning the window is made longer to whole revolutions",
    needs=CONTACT | Capability.DRIVE_STEP,
    moves=True,
)
def revolutions(rig: Rig) -> str:
    machine = rig.machine
    rig.turning()
    turn_ticks = 1000.0 * machine.steps_per_turn / machine.pace
    a_count = turn_ticks / machine.counts_per_turn  # nothing on the line is finer
    rig.accept(m.Measure(100, 1))
    _next(rig, 8 * turn_ticks / 1000 + 1)
    windows = []
    for _ in range(3):
        reading = _next(rig, 8 * turn_ticks / 1000 + 1)
        must(bool(reading.flags & ReadingFlag.TURNING), "flag turning is missing")
        turns = max(1, round(reading.window / turn_ticks))
        must(reading.window >= 100, f"window {reading.window}; at least 100 was asked for")
        must(
            abs(reading.window - turns * turn_ticks)
            <= 2 + 0.01 * turns * turn_ticks + (a_count if a_count > 2 else 0),
            f"window {reading.window} ticks is no whole number of revolutions of {turn_ticks:.1f} ticks",
        )
        back = rig.status.count - reading.count
        half = (reading.window + 100) / 2 * machine.counts_per_turn / turn_ticks
        must(
            abs(back - half)
            <= 0.15 * machine.counts_per_turn + 60 * machine.counts_per_turn / turn_ticks + 1,
            f"its count is {back} back; the middle is {half:.0f} back",
        )
        windows.append(reading.window)
    rig.accept(m.Measure(0, 0))
    return f"windows {windows} of {turn_ticks:.0f} ticks a turn"


@clause(8, "", "Measure is refused as not_fitted on a board without a contact")
def not_fitted(rig: Rig) -> None:
    rig.fresh()
    if not rig.capabilities & CONTACT:
        rig.refuse(m.Measure(100, 0), Refusal.NOT_FITTED)
