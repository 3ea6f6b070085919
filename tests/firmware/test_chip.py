"""The real program on the emulated chip: it starts, talks, and winds exactly, within its time and memory."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import replace
from itertools import pairwise
from pathlib import Path

import pytest

from tests.firmware.build import run
from tests.firmware.chip import CYCLES_PER_TICK, HZ
from tests.firmware.chip_bench import ChipBench
from tests.machine.plant.worlds import BOBBIN
from tests.machine.virtual.bare_host import PITCH_STEPS, SETUP, BareHost
from windctl.machine.plant.plant import Plant
from windctl.protocol import messages as m

Elf = Callable[..., Path]

CRUISE = 10_000  # steps/s: 1500 rpm at 400 a turn
WORST_INTERRUPT = 400  # cycles
WORST_TICK = int(0.8 * CYCLES_PER_TICK)
HEADROOM = 200  # bytes


def bench_of(elf: Path, seed: int = 1) -> ChipBench:
    """The chip in front of a plant with everything."""
    return ChipBench(elf, Plant(BOBBIN, seed))


def host_of(bench: ChipBench) -> BareHost:
    """A host on the bench's line."""

    def wait(ticks: int) -> bytes:
        bench.advance(ticks)
        return bench.take()

    return BareHost(bench.send, wait)


def memory(elf: Path) -> tuple[int, int]:
    """Flash and RAM, bytes."""
    told = run("avr-size", ["-C", "--mcu=atmega328p", elf])
    flash, ram = re.search(r"Program:\s+(\d+)", told), re.search(r"Data:\s+(\d+)", told)
    assert flash and ram
    return int(flash[1]), int(ram[1])


@pytest.mark.parametrize(
    ("variant", "without"),
    [
        ("full", m.Capability(0)),
        ("hand", m.Capability.GUIDE_STEP),
        (
            "counter",
            m.Capability.GUIDE_STEP | m.Capability.DRIVE_STEP | m.Capability.INDEX | m.Capability.PEDAL,
        ),
    ],
)
def test_it_starts_with_everything_off_and_says_what_it_is(
    chip: Elf, variant: str, without: m.Capability
) -> None:
    bench = bench_of(chip(variant))
    host = host_of(bench)
    identity = host.greet()
    everything = m.Capability(0x7F)
    assert identity.schema == m.SCHEMA
    assert identity.capabilities == everything & ~without
    assert (identity.boot, identity.state, identity.trust) == (1, m.State.DRIVES_OFF, 0)
    assert not bench.chip.high("drive_enable")
    assert not bench.chip.high("guide_enable")
    assert (bench.steps, bench.guide_steps) == (0, 0)
    flash, ram = memory(chip(variant))
    print(f"{variant}: {flash} of 32768 bytes of flash, {ram} of 2048 bytes of RAM")


def test_a_counter_counts_a_turn_a_pulse(chip: Elf) -> None:
    bench = bench_of(chip("counter"))
    host = host_of(bench)
    host.greet()
    for _ in range(7):
        bench.chip.set("a", 1)
        host.pass_time(20)
        bench.chip.set("a", 0)
        host.pass_time(20)
    host.pass_time(60)
    assert host.status is not None
    assert host.status.count == 7


@pytest.fixture(scope="module")
def wound(chip: Elf) -> tuple[ChipBench, BareHost, list[str], list[int]]:
    """100 turns at 1500 rpm, with all that a host says and asks meanwhile."""
    bench = bench_of(chip())
    host = host_of(bench)
    host.greet()
    host.make_ready(replace(SETUP, accel=10_000, decel=10_000))
    times = bench.chip.watch_interrupts()
    edges: list[int] = []
    bench.on_step = edges.append
    bench.begin_measuring()
    host.ask(m.Measure(200, 200))
    host.go(100 * 400, CRUISE)
    host.wind_until_held()
    host.pass_time(300)
    assert max(times.worst.values()) <= WORST_INTERRUPT, times.worst
    return bench, host, list(times.table()), edges


def test_a_hundred_turns_are_exactly_so_many_counts_steps_and_guide_steps(
    wound: tuple[ChipBench, BareHost, list[str], list[int]],
) -> None:
    bench, host, _, _ = wound
    assert host.status is not None
    assert (host.status.state, host.status.cause) == (m.State.HELD, m.Cause.STOP_POINT)
    assert host.status.count == bench.counts_shown == bench.steps == 40_000
    stroke = 2080 // PITCH_STEPS  # whole pitches before the even lay turns round
    away, back = divmod(100, 2 * stroke)
    assert away == 1
    expected = PITCH_STEPS * (back if back <= stroke else 2 * stroke - back)
    assert bench.guide_steps == host.status.guide == expected
    assert bench.plant.guide.motor == expected


def test_no_byte_is_lost_and_time_and_memory_suffice(
    wound: tuple[ChipBench, BareHost, list[str], list[int]], chip: Elf
) -> None:
    bench, host, interrupts, _ = wound
    assert host.status is not None
    assert (bench.chip.overruns, bench.chip.peek("line_overruns"), host.status.bad_frames) == (0, 0, 0)
    assert len(host.readings) >= 5
    flash, ram = memory(chip())
    headroom = bench.chip.stack_never_used(ram)
    print(f"flash {flash} of 32768 bytes, RAM {ram} of 2048 bytes, stack headroom {headroom} bytes")
    print(f"worst tick {bench.worst_busy / 16000:.3f} ms, load {bench.load:.1%}")
    print("\n".join(interrupts))
    assert bench.worst_busy < WORST_TICK
    assert headroom >= HEADROOM


def test_steps_at_a_steady_pace_come_at_equal_distances(
    wound: tuple[ChipBench, BareHost, list[str], list[int]],
) -> None:
    """10 000 a second: 1600 cycles each, give or take the interrupts that were under way."""
    _, _, _, edges = wound
    gaps = [after - before for before, after in pairwise(edges)]
    cruising = gaps[len(gaps) // 2 - 2000 : len(gaps) // 2]
    assert sum(cruising) == pytest.approx(2000 * HZ / CRUISE, abs=200)
    assert max(abs(gap - HZ // CRUISE) for gap in cruising) <= 400


def test_the_other_rotation_counts_up_too(chip: Elf) -> None:
    bench = bench_of(chip())
    host = host_of(bench)
    host.greet()
    host.make_ready(replace(SETUP, rotation=1))
    host.go(2 * 400 + 3, 2000)
    status = host.wind_until_held()
    assert bench.chip.high("way")
    assert status.count == bench.counts_shown == bench.steps == 2 * 400 + 3


def test_the_boot_number_outlives_a_brown_out_in_mid_coil(chip: Elf) -> None:
    bench = bench_of(chip())
    host = host_of(bench)
    host.greet()
    host.make_ready()
    host.go(100 * 400, 4000)
    host.pass_time(1500)
    assert bench.chip.high("drive_enable")
    bench.plant.set_guard(closed=False)
    host.pass_time(1)
    bench.brown_out()
    assert not bench.chip.high("drive_enable")
    assert not bench.chip.high("guide_enable")
    steps = bench.steps
    identity = host.greet()
    assert (identity.boot, identity.state, identity.trust) == (2, m.State.DRIVES_OFF, 0)
    host.pass_time(500)
    assert bench.steps == steps
    assert host.status is not None
    assert host.status.inputs & (m.InputBit.GUARD_OK | m.InputBit.STOP_OK) == m.InputBit.STOP_OK
