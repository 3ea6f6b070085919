"""Coils of unknown make that grow by their own laws, and what can be measured of them outside."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi
from typing import Any

import numpy as np

from windctl.coil.geometry import Core
from windctl.shop.one_wire import Outside

GAUGES = range(39, 45)
# IEC 60317-0-1, least and greatest overall diameter over the bare one, by bare diameter, as in a wire maker's
# published table; between its rows in proportion.
BARE = (0.050, 0.056, 0.060, 0.063, 0.067, 0.071, 0.080, 0.090, 0.100)
COAT = {
    "grade 1": ((5, 6, 6, 6, 7, 7, 7, 8, 8), (10, 11, 12, 13, 13, 13, 14, 15, 17)),
    "grade 2": ((11, 12, 13, 14, 14, 14, 15, 16, 18), (16, 18, 19, 20, 21, 20, 21, 23, 25)),
}


@dataclass(frozen=True)
class Unknown:
    """The truth of one coil, and its measurements."""

    gauge: str
    grade: str
    bare_mm: float
    turns: int
    metres: float
    outside: Outside


def draw(seed: int, *, weighed: bool) -> Unknown:
    """A coil drawn from anything that is wound: gauge, grade, style, turns, bobbin; its wire's tolerance 4 %
    cut at 8 %, thickness anywhere in its grade, packing 0.54-0.72 scatter, 0.67-0.80 even, trend +-5 %, crown
    1.00-1.12, core 0.5 %, stretch 0-0.8 %; meter 0.3 %, thermometer 0.5 K, caliper 0.1 mm on the highest heap
    (2 to 8 % over the mean with the crown), scale 0.05 g."""
    rng = np.random.default_rng([77, seed])
    number = int(rng.choice(np.array(GAUGES)))
    nominal = 0.127 * 92.0 ** ((36 - number) / 39)
    grade = str(rng.choice(list(COAT)))
    level = float("inf")
    while abs(level) > 2.0:
        level = float(rng.standard_normal())
    bare = nominal / np.sqrt(1.0 + 0.04 * level)
    least, greatest = (np.interp(nominal, BARE, side) / 1000.0 for side in COAT[grade])
    overall = nominal + rng.uniform(least, greatest)
    even = bool(rng.random() < 0.5)
    core = Core(half_long_mm=rng.uniform(20.0, 35.0), half_short_mm=0.0, radius_mm=rng.uniform(2.0, 4.0))
    gap = rng.uniform(7.0, 14.0)
    turns = int(rng.uniform(4000, 9000) * (0.0633 / nominal))
    n = np.arange(turns)
    packing = rng.uniform(0.67, 0.80) if even else rng.uniform(0.54, 0.72)
    packing = packing * (1.0 + rng.uniform(-0.05, 0.05) * (2.0 * n / turns - 1.0))
    build = np.cumsum(pi / 4.0 * overall**2 / (packing * gap))
    crown = rng.uniform(1.00, 1.12)
    perimeter = core.perimeter_mm * (1.0 + 0.005 * float(rng.standard_normal()))
    metres = float((perimeter + 2.0 * pi * crown * build).sum()) / 1000.0
    stretch = 1.0 + rng.uniform(0.0, 0.008)
    copper = pi / 4.0 * bare**2
    ohm = metres / 58.0 / copper * stretch
    grams = metres / stretch * (8.89 * copper + 1.2 * (pi / 4.0 * overall**2 - copper))
    grams *= 1.0 + 0.003 * float(rng.standard_normal())  # what metal and enamel weigh
    celsius = rng.uniform(15.0, 28.0)
    raw = ohm * (1.0 + 0.00393 * (celsius - 20.0)) * (1.0 + 0.003 * float(rng.standard_normal()))
    heap = 1.0 + rng.uniform(0.0, 0.5) * (crown - 1.0) + rng.uniform(0.0, 0.05)
    measured: dict[str, Any] = {"grams": grams + 0.05 * float(rng.standard_normal())} if weighed else {}
    return Unknown(
        gauge=f"AWG {number}",
        grade=grade,
        bare_mm=float(bare / np.sqrt(stretch)),
        turns=turns,
        metres=metres,
        outside=Outside(
            ohm=raw, ohm_rel=0.003, celsius=celsius + 0.5 * float(rng.standard_normal()), celsius_sd=0.5,
            core=core, gap_mm=gap, build_mm=float(build[-1]) * heap + 0.1 * float(rng.standard_normal()),
            build_sd_mm=0.1, grams_sd=0.05, **measured,
        ),
    )  # fmt: skip
