"""Plants for the tests: the worked bobbin of the check values, and a way to run one without a board."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import replace
from itertools import cycle

from windctl.machine.plant.plant import Plant
from windctl.machine.plant.spec import PlantSpec
from windctl.machine.twin.signals import Inputs, Outputs

RPM_1000 = 6667  # steps/s at 400 steps per turn

# Straight 50 mm, end radius 3 mm, window 11 mm, 8000 turns of 5.4716 ohm/m wire of 0.072 mm overall.
BOBBIN = PlantSpec(
    perimeter_mm=100.0 + 6.0 * math.pi,
    perimeter_sd_rel=0.003,
    straight_mm=50.0,
    core_area_mm2=300.0 + 9.0 * math.pi,
    gap_mm=11.0,
    ohm_per_m=5.4716,
    ohm_per_m_sd=0.04 * 5.4716,
    overall_mm=0.072,
    overall_sd_mm=0.001,
    packing=0.63,
    packing_sd=0.06,
    margin_mm=0.3,
    turns=8000.0,
    turns_per_pass=47.0,
    cruise_rpm=1000.0,
)
HAND_GUIDED = replace(BOBBIN, guide=False)


def to_and_fro(margin_mm: float, gap_mm: float, turns_per_pass: float) -> Iterator[float]:
    """Guide positions of a lay that goes to and fro at an even pace, turn by turn, without end."""
    stroke = gap_mm - 2.0 * margin_mm
    passes, at = cycle((1.0, -1.0)), 0.0
    way = next(passes)
    while True:
        yield margin_mm + at
        at += way * stroke / turns_per_pass
        while not 0.0 <= at <= stroke:
            at = 2.0 * stroke - at if at > stroke else -at
            way = next(passes)


def wind(plant: Plant, ticks: int, rate: int = RPM_1000, powered: int = 1) -> list[Inputs]:
    """Drives the spindle for so many ticks; what the board would have seen, tick by tick."""
    outputs = Outputs()
    outputs.rate, outputs.drive_enable, outputs.guide_enable = rate, powered, powered
    seen = []
    for _ in range(ticks):
        inputs = Inputs()
        plant.step(outputs, inputs)
        seen.append(inputs)
    return seen


def wind_turns(plant: Plant, turns: float, rate: int = RPM_1000) -> None:
    """Drives the spindle until the plant's coil has `turns`, in whole ticks."""
    outputs, inputs = Outputs(), Inputs()
    outputs.rate, outputs.drive_enable = rate, 1
    until = plant.position + turns * plant.spec.steps_per_turn
    while plant.position < until:
        plant.step(outputs, inputs)
