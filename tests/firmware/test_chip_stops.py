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
from tests.machine.virtual.bare_host import SETUP, BareHost
from windctl.protocol import messages as m
from windctl.protocol.frames import encode

Elf = Callable[..., Path]
Happens = Callable[[ChipBench, BareHost], None]

PACE = 4000  # steps/s
QUICK = replace(SETUP, accel=CRUISE, decel=CRUISE)


def winding(
    chip: Elf, setup: m.Setup = QUICK, pace: int = PACE, turns: int = 60
) -> tuple[ChipBench, BareHost]:
    """A chip that winds at this pace."""
    bench = bench_of(chip())
    host = host_of(bench)
    host.greet()
    if setup.fitted & m.Capability.PEDAL:
        bench.plant.press_pedal(down=False)
    host.make_ready(setup, turns=turns)
    if setup.fitted & m.Capability.PEDAL:
        bench.plant.press_pedal(down=True)
        host.pass_time(100)
    host.go(turns * 400, pace)
    while host.status is None or host.status.speed != pace:
        host.pass_time(50)
    host.pass_time(100)
    return bench, host


def test_silence_brakes_after_two_seconds_and_nothing_turns_afterwards(chip: Elf) -> None:
    setup = QUICK
    bench, host = winding(chip, setup, CRUISE, turns=120)
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


def _slip(bench: ChipBench, _host: BareHost) -> None:
    bench.plant.spindle.slip(0.5)


def _stall(bench: ChipBench, _host: BareHost) -> None:
    bench.plant.spindle.slip(0.0)


def _no_index(bench: ChipBench, _host: BareHost) -> None:
    bench.plant._index_lost = True


def _back(bench: ChipBench, _host: BareHost) -> None:
    bench.plant.spindle.slip(0.0)
    bench.plant.position -= 60


def _fast(bench: ChipBench, _host: BareHost) -> None:
    until = bench.ticks + 64

    def driven_from_outside(_received: bytes) -> None:
        if bench.ticks < until:
            bench.plant.position += 8

    bench.watch = driven_from_outside


def _caught(bench: ChipBench, _host: BareHost) -> None:
    bench.watch = lambda _received: bench.chip.set_volts("tension", 4.0)


def _guide_at_its_end(bench: ChipBench, _host: BareHost) -> None:
    bench.plant.guide.set_to(1_000_000)


def _lose_state(bench: ChipBench, host: BareHost) -> None:
    """A bit of memory tips over: the state is none that there is."""
    core, status = bench.chip.peek_bytes("core"), host.status
    assert status is not None
    place = status.boot.to_bytes(2, "little") + status.epoch.to_bytes(2, "little") + bytes((status.state,))
    assert core.count(place) == 1
    bench.chip.poke("core", core.index(place) + 4, 99)


LOOSE = replace(QUICK, slip_counts=5000)  # so that it is not slip that stops it first
TURN_MS = 400 * 1000 // PACE

# what happens, the trip, and the time within which it must be noticed, ms
CASES: list[tuple[str, Happens, m.Setup, m.Trip, int]] = [
    ("stop input", lambda b, _: b.plant.set_stop(closed=False), QUICK, m.Trip.STOP_INPUT, 2),
    ("guard", lambda b, _: b.plant.set_guard(closed=False), QUICK, m.Trip.GUARD, 2),
    ("guide limit switch", _guide_at_its_end, QUICK, m.Trip.GUIDE_LIMIT, 2),
    ("broken wire", lambda b, _: b.plant.break_wire(), QUICK, m.Trip.TENSION_LOW, 2 * TURN_MS + 2),
    ("caught wire", _caught, QUICK, m.Trip.TENSION_HIGH, 2 * TURN_MS + 2),
    ("slip", _slip, QUICK, m.Trip.SLIP, 66),
    ("stall", _stall, QUICK, m.Trip.SLIP, 66),
    ("lost index", _no_index, QUICK, m.Trip.INDEX, 2 * TURN_MS + TURN_MS // 2 + 66),
    ("reverse", _back, LOOSE, m.Trip.REVERSE, 3),
    ("overspeed", _fast, replace(LOOSE, max_pace=PACE), m.Trip.OVERSPEED, 66),
    ("lost state", _lose_state, QUICK, m.Trip.INTERNAL, 66),
]


def test_every_trip_there_is_is_tried() -> None:
    assert {trip for _, _, _, trip, _ in CASES} == set(m.TRIPS) - {m.Trip.NONE}


@pytest.mark.parametrize(
    ("happens", "setup", "trip", "within"), [c[1:] for c in CASES], ids=[c[0] for c in CASES]
)
def test_a_trip_ends_as_the_table_says(
    chip: Elf, happens: Happens, setup: m.Setup, trip: m.Trip, within: int
) -> None:
    bench, host = winding(chip, setup)
    before = bench.ticks
    happens(bench, host)
    steps, guide_steps = bench.steps, bench.guide_steps
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
    host.pass_time(1000 * PACE // QUICK.decel + 400)
    status = host.status
    assert status is not None
    assert (status.state, status.trip) == (m.State.TRIPPED, trip)
    assert bool(status.trust & m.Trust.COUNT) == row.count
    assert bool(status.trust & m.Trust.GUIDE) == row.guide
    assert not bench.chip.high("drive_enable")
    assert not bench.chip.high("guide_enable")
    stood = bench.steps
    if trip == m.Trip.GUIDE_LIMIT:
        assert abs(bench.guide_steps - guide_steps) <= 3  # it does not follow the spindle to its end
    assert stood - steps <= PACE**2 // (2 * QUICK.decel) + within * PACE // 1000 + 20
    host.pass_time(500)
    assert bench.steps == stood


def test_letting_the_pedal_go_holds_in_that_tick(chip: Elf) -> None:
    bench, host = winding(chip, replace(QUICK, fitted=QUICK.fitted | m.Capability.PEDAL))
    before = bench.ticks
    bench.plant.press_pedal(down=False)
    held: list[m.Status] = []
    while not held:
        held = [
            came for came in host.pass_time(10) if isinstance(came, m.Status) and came.state == m.State.HELD
        ]
    assert held[0].cause == m.Cause.PEDAL
    assert held[0].ticks - before <= 2
    host.pass_time(1000 * PACE // QUICK.decel + 200)
    assert bench.chip.high("drive_enable")  # category 2 stays powered
    stood = bench.steps
    bench.plant.press_pedal(down=True)
    host.pass_time(500)
    assert bench.steps == stood  # a fresh press only asks
    assert any(isinstance(x, m.Notice) and x.kind == m.NoticeKind.PEDAL_ASKS for x in host.heard)
