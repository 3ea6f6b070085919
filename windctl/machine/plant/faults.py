"""What can go wrong with a machine, for tests and for practice: each at a turn or a tick, None for never."""

from __future__ import annotations

from dataclasses import dataclass

from windctl.machine.twin.signals import GUARD_OK, STOP_OK


@dataclass(frozen=True, slots=True)
class Faults:
    """Turns count whole turns on the bobbin; ticks count from switching on."""

    wire_breaks_at_turn: int | None = None
    belt_slips_at_turn: int | None = None
    belt_grip: float = 0.7  # share of the motor's steps that a slipping belt carries
    encoder_sticks_at_turn: int | None = None
    index_lost_at_turn: int | None = None
    guard_opens_at_tick: int | None = None
    stop_opens_at_tick: int | None = None
    closes_after_ticks: int | None = None  # guard and stop; None: they stay open


def gate_times(faults: Faults) -> list[tuple[int, int, bool]]:
    """(tick, pin, closed) of guard and stop, in the order in which they happen."""
    times: list[tuple[int, int, bool]] = []
    for pin, opens in ((GUARD_OK, faults.guard_opens_at_tick), (STOP_OK, faults.stop_opens_at_tick)):
        if opens is not None:
            times.append((opens, pin, False))
            if faults.closes_after_ticks is not None:
                times.append((opens + faults.closes_after_ticks, pin, True))
    return sorted(times)
