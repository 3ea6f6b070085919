"""The whole host winds a coil on the virtual machine and on the real program: the same facts in each tick."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from tests.firmware.alike import Made, on_chip, on_virtual
from tests.run.winding import SHIPPED, with_stop
from windctl.protocol.messages import Identity, Message, Reading, Status

Elf = Callable[..., Path]

APART_S = 0.002
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
    # board times are in the messages themselves, and equal; these are the host's, from the greeting on
    greeted = next(at for at, (_, message) in enumerate(chip.heard) if isinstance(message, Identity))
    assert max(abs(one - other) for (one, _), (other, _) in pairs[greeted:]) <= APART_S
    assert chip.bench.counts_shown == chip.bench.steps == turns * 400
    assert chip.bench.guide_steps == virtual.bench.plant.guide.motor
    for (_, one), (_, other) in pairs:
        if isinstance(one, Reading) and isinstance(other, Reading):
            assert abs(one.value - other.value) <= 16 * CONVERTER_UNITS
        if isinstance(one, Status) and isinstance(other, Status):
            assert abs(one.tension - other.tension) <= CONVERTER_UNITS
    bench = chip.bench
    print(
        f"{turns} turns, {bench.ticks / 1000:.1f} s, {len(chip.heard)} messages: load {bench.load:.1%}, "
        f"worst tick {bench.worst_busy / 16000:.3f} ms, overruns {bench.chip.overruns}"
    )
    assert bench.chip.overruns == bench.chip.peek("line_overruns") == 0


def wind_both(chip: Elf, turns: int, folder: Path) -> None:
    text = with_stop(SHIPPED, turns=turns, tolerance_pct=0.5)
    virtual = on_virtual(text, folder / "virtual.db")
    check_alike(virtual, on_chip(chip("full", "-DWINDCTL_EMULATED"), text, folder / "chip.db"), turns)


def test_a_coil_is_the_same_on_the_chip(chip: Elf, tmp_path: Path) -> None:
    wind_both(chip, 40, tmp_path)


@pytest.mark.long
@pytest.mark.timeout(1200)
def test_a_thousand_turns_are_the_same_on_the_chip(chip: Elf, tmp_path: Path) -> None:
    wind_both(chip, 1000, tmp_path)
