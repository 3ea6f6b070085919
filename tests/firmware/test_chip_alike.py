"""The whole host winds a coil on the virtual machine and on the real program: the same facts in each tick."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from tests.firmware.alike import Made, on_chip, on_virtual
from tests.run.winding import SHIPPED, with_key, with_stop
from windctl.protocol.messages import Identity, Message, Reading, Status

Elf = Callable[..., Path]

APART_MS = 2.0
CONVERTER_UNITS = 64  # one step of ten bits, in units of sixteen


def without_what_is_measured(message: Message) -> Message:
    """A message without the figures that come through a converter, which a simulated board does not have."""
    if isinstance(message, Status):
        return replace(message, tension=0, celsius=0)
    if isinstance(message, Reading):
        return replace(message, value=0, celsius=0)
    if isinstance(message, Identity):
        return replace(message, capabilities=0)
    return message


def check_alike(virtual: Made, chip: Made, turns: int) -> None:
    assert virtual.ended.left == chip.ended.left == "finished"
    told = [[without_what_is_measured(message) for _, message in made.heard] for made in (virtual, chip)]
    assert told[0] == told[1]
    pairs = list(zip(virtual.heard, chip.heard, strict=True))
    # Board times are in the messages themselves, and equal. These are the line's: what an adapter hands over
    # together, and so when a host hears of it, hangs on fractions of a millisecond.
    apart = max(abs(a - b) for a, b in zip(virtual.frames_out, chip.frames_out, strict=True))
    assert len(chip.frames_out) >= len(chip.heard)
    assert apart <= APART_MS
    assert chip.bench.counts_shown == chip.bench.steps == turns * 400
    assert chip.bench.guide_steps == virtual.bench.plant.guide.motor
    for (_, one), (_, other) in pairs:
        if isinstance(one, Reading) and isinstance(other, Reading):
            assert abs(one.value - other.value) <= 16 * CONVERTER_UNITS
        if isinstance(one, Status) and isinstance(other, Status):
            assert abs(one.tension - other.tension) <= CONVERTER_UNITS
    bench = chip.bench
    print(
        f"{turns} turns, {bench.ticks / 1000:.1f} s, {len(chip.heard)} messages, at most {apart:.2f} ms "
        f"apart: load {bench.load:.1%}, worst tick {bench.worst_busy / 16000:.3f} ms"
    )
    assert bench.chip.overruns == bench.chip.peek("line_overruns") == 0


def wind_both(chip: Elf, recipe: str, turns: int, folder: Path) -> None:
    text = with_stop(recipe, turns=turns, tolerance_pct=0.5)
    virtual = on_virtual(text, folder / "virtual.db")
    check_alike(virtual, on_chip(chip("full", "-DWINDCTL_EMULATED"), text, folder / "chip.db"), turns)


def test_a_coil_is_the_same_on_the_chip(chip: Elf, tmp_path: Path) -> None:
    wind_both(chip, with_key(with_key(SHIPPED, "start_turns", 4), "finish_turns", 6), 30, tmp_path)


@pytest.mark.long
@pytest.mark.timeout(1200)
def test_a_thousand_turns_are_the_same_on_the_chip(chip: Elf, tmp_path: Path) -> None:
    wind_both(chip, SHIPPED, 1000, tmp_path)
