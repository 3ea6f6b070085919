"""What stops the chip: silence, inputs and each trip, as the specification and its table of trips have it."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from tests.conftest import LONG
from tests.firmware.chip import HZ
from tests.firmware.chip_bench import ChipBench
from tests.firmware.test_chip import CRUISE, bench_of, host_of
from tests.machine.bare_host import SETUP, BareHost
from windctl.protocol import messages as m
from windctl.protocol.frames import encode

Elf = Callable[..., Path]

PACE = 4000  # steps/s


def winding(chip: Elf, setup: m.Setup = SETUP, pace: int = PACE) -> tuple[ChipBench, BareHost]:
    """A chip that winds at this pace."""
    bench = bench_of(chip())
    host = host_of(bench)
    host.greet()
    if setup.fitted & m.Capability.PEDAL:
        bench.plant.press_pedal(down=False)
    host.make_ready(setup)
    if setup.fitted & m.Capability.PEDAL:
        bench.plant.press_pedal(down=True)
        host.pass_time(100)
    host.go(120 * 400, pace)
    while host.status is None or host.status.speed != pace:
        host.pass_time(50)
    host.pass_time(300)
    return bench, host


def test_silence_brakes_after_two_seconds_and_nothing_turns_afterwards(chip: Elf) -> None:
    setup = replace(SETUP, accel=CRUISE, decel=CRUISE)
    bench, host = winding(chip, setup, pace=CRUISE)
    sent: list[int] = []
    send = host._send

    def watched(data: bytes) -> None:
        if data == beat:
            sent.append(bench.chip.cycle)
        send(data)

    beat = encode(m.Beat.CODE, 0, b"")
    host._send = watched
    while not sent:
        host.pass_time(10)
    host.beating = False
    edges: list[int] = []
    bench.on_step = edges.append
    heard = sent[-1] / HZ + 0.001  # its six bytes take half a millisecond, and a tick takes them
    for _ in range(5):
        host.ask(m.Measure(100, 0))  # other traffic goes on
    while host.status is None or host.status.state == m.State.TURNING:
        host.pass_time(10)
    host.pass_time(1000 * CRUISE // setup.decel + 200)
    slower = begins_to_brake(edges)
    took = slower / HZ - heard
    after = sum(edge > slower for edge in edges)
    print(f"braking begins {took:.4f} s after the last Beat; stands {after} steps later")
    assert took == pytest.approx(2.0, abs=0.010)
    assert after <= CRUISE**2 / (2 * setup.decel) + 0.01 * CRUISE
    assert (host.status.state, host.status.cause) == (m.State.HELD, m.Cause.SILENCE)
    stood, counted = bench.steps, host.status.count
    assert counted == bench.counts_shown == stood
    host.pass_time(60_000 if LONG else 4_000)
    assert bench.steps == stood


def begins_to_brake(edges: list[int]) -> float:
    """The cycle at which steps begin to stay behind a steady pace.

    The first that is clearly late tells, less the time that constant braking takes to make it so:
    s = a * t^2 / 2.
    """
    gap = HZ // CRUISE
    late = 400  # cycles: more than interrupts can delay a step
    steady = len(edges) // 4  # no step before has been late
    at = next(
        at for at in range(steady, len(edges)) if edges[at] - edges[steady] > gap * (at - steady) + late
    )
    return edges[at] - HZ * math.sqrt(2 * (late / gap) / CRUISE)


def _slip(bench: ChipBench) -> None:
    bench.plant.spindle.slip(0.5)


def _stall(bench: ChipBench) -> None:
    bench.plant.spindle.slip(0.0)


def _no_index(bench: ChipBench) -> None:
    bench.plant._index_lost = True


def _back(bench: ChipBench) -> None:
    bench.plant.spindle.slip(0.0)
    bench.plant.position -= 60


def _fast(bench: ChipBench) -> None:
    until = bench.ticks + 64

    def driven_from_outside(_received: bytes) -> None:
        if bench.ticks < until:
            bench.plant.position += 8

    bench.watch = driven_from_outside


LOOSE = replace(SETUP, slip_counts=5000)  # so that it is not slip that stops it first
TURN_MS = 400 * 1000 // PACE

# what happens, the trip, and the time within which it must be noticed, ms
CASES: list[tuple[str, Callable[[ChipBench], None], m.Setup, m.Trip, int]] = [
    ("stop input", lambda b: b.plant.set_stop(closed=False), SETUP, m.Trip.STOP_INPUT, 2),
    ("guard", lambda b: b.plant.set_guard(closed=False), SETUP, m.Trip.GUARD, 2),
    ("broken wire", lambda b: b.plant.break_wire(), SETUP, m.Trip.TENSION_LOW, 2 * TURN_MS + 2),
    ("slip", _slip, SETUP, m.Trip.SLIP, 66),
    ("stall", _stall, SETUP, m.Trip.SLIP, 66),
    ("lost index", _no_index, SETUP, m.Trip.INDEX, 2 * TURN_MS + TURN_MS // 2 + 66),
    ("reverse", _back, LOOSE, m.Trip.REVERSE, 3),
    ("overspeed", _fast, replace(LOOSE, max_pace=PACE), m.Trip.OVERSPEED, 66),
]


@pytest.mark.parametrize(
    ("happens", "setup", "trip", "within"), [c[1:] for c in CASES], ids=[c[0] for c in CASES]
)
def test_a_trip_ends_as_the_table_says(
    chip: Elf, happens: Callable[[ChipBench], None], setup: m.Setup, trip: m.Trip, within: int
) -> None:
    bench, host = winding(chip, setup)
    before = bench.ticks
    happens(bench)
    steps = bench.steps
    tripped: list[m.Notice] = []
    while not tripped:
        tripped = [
            came
            for came in host.pass_time(10)
            if isinstance(came, m.Notice) and came.kind == m.NoticeKind.TRIPPED
        ]
        assert bench.ticks < before + within + 100, "it did not trip"
    notice = tripped[0]
    row = m.TRIPS[trip]
    assert notice.a == trip
    assert notice.ticks - before <= within
    host.pass_time(20)
    if row.category == 0:
        assert not bench.chip.high("drive_enable")
        assert bench.steps - steps <= (notice.ticks - before + 1) * PACE // 1000 + 1
    else:
        assert bench.chip.high("drive_enable")
    host.pass_time(1000 * PACE // SETUP.decel + 400)
    status = host.status
    assert status is not None
    assert (status.state, status.trip) == (m.State.TRIPPED, trip)
    assert bool(status.trust & m.Trust.COUNT) == row.count
    assert bool(status.trust & m.Trust.GUIDE) == row.guide
    assert not bench.chip.high("drive_enable")
    assert not bench.chip.high("guide_enable")
    stood = bench.steps
    assert stood - steps <= PACE**2 // (2 * SETUP.decel) + within * PACE // 1000 + 20
    host.pass_time(500)
    assert bench.steps == stood


def test_letting_the_pedal_go_holds_in_that_tick(chip: Elf) -> None:
    bench, host = winding(chip, replace(SETUP, fitted=SETUP.fitted | m.Capability.PEDAL))
    before = bench.ticks
    bench.plant.press_pedal(down=False)
    held: list[m.Status] = []
    while not held:
        held = [
            came for came in host.pass_time(10) if isinstance(came, m.Status) and came.state == m.State.HELD
        ]
    assert held[0].cause == m.Cause.PEDAL
    assert held[0].ticks - before <= 2
    host.pass_time(1000 * PACE // SETUP.decel + 200)
    assert bench.chip.high("drive_enable")  # category 2 stays powered
    stood = bench.steps
    bench.plant.press_pedal(down=True)
    host.pass_time(500)
    assert bench.steps == stood  # a fresh press only asks
    assert any(isinstance(x, m.Notice) and x.kind == m.NoticeKind.PEDAL_ASKS for x in host.heard)
