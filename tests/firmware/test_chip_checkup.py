"""The check-up that `windctl machine check` runs, on the real program: the machine is as its profile says."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any, cast

import pytest

from tests.checkup.driving import drive, profile
from tests.firmware.chip_bench import ChipBench
from windctl.checkup.plan import STEPS, calibrations, chosen
from windctl.checkup.step import Step, Verdict
from windctl.desk.ordinary import ORDINARY
from windctl.machine.plant.made_for import plant_for
from windctl.machine.plant.plant import Plant
from windctl.recipe.load import parse_recipe

Elf = Callable[..., Path]

WITH_PEDAL = profile(pedal=cast("Any", True))
SOME = ("inputs", "contact_zero", "hold", "guide")


def check(elf: Path, steps: list[Step]) -> None:
    bench = ChipBench(elf, Plant(plant_for(parse_recipe(ORDINARY, "ordinary coil"), WITH_PEDAL), 1))
    results = drive(cast("Any", bench), WITH_PEDAL, steps)
    assert {key: one.verdict for key, one in results.items()} == {one.key: Verdict.GOOD for one in steps}
    found = calibrations(results.values())
    assert found["readings.lead_ohm"] == pytest.approx(bench.plant._fate(0).offset_ohm, abs=0.25)
    assert not bench.chip.high("drive_enable")
    assert not bench.chip.high("guide_enable")
    assert bench.chip.overruns == 0
    for result in results.values():
        print(f"{result.key}: {result.measured}; limit {result.limit}")


def test_steps_of_every_kind_are_good_on_the_chip(chip: Elf) -> None:
    check(chip(), list(chosen(SOME)))


@pytest.mark.long
def test_every_step_is_good_on_the_chip(chip: Elf) -> None:
    check(chip(), list(STEPS))
