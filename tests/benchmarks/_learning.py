"""How far the next coil of a lot is foreseen, coil by coil, and what is found of unknown coils."""

from __future__ import annotations

import numpy as np

from tests.forecast.scoring import Score
from tests.forecast.truth import DEFAULT, FINE
from tests.plan.experience import test_lots
from tests.plan.experience.lots import Lots
from tests.plan.experience.test_lots import by_reading, by_readings, by_scale, wind
from tests.shop.unknown_truth import draw
from windctl.shop.unknown_coil import identify

COILS = 20
ASKED = {2: "<= 0.30", 20: "<= 0.24"}


def like_coils(seeds: range) -> None:
    """The row of the table after three like coils from the same spool, each read once at rest."""
    test_lots.FIRST_SEED = seeds[0]
    for name, meter in (("usual meter", DEFAULT), ("fine meter", FINE)):
        seen = wind(len(seeds), 4, meter, by_reading)
        score = Score(seen.errors[:, 3], seen.halves[:, 3])
        print(
            f"  {'none, after 3 like, ' + name:38} 1.000 {100 * score.rms:7.4f} {100 * score.rms_se:6.4f} "
            f"{100 * score.held:6.1f} {score.sharp:9.2f}"
        )


def lots(first_seed: int, number: int) -> None:
    """Lots of coils from one spool, gauge start, by what is measured of each finished coil."""
    test_lots.FIRST_SEED = first_seed
    print(f"  {number} lots of {COILS} coils from one spool each, drawn from\n  {Lots()}")
    print(f"  usual meter {DEFAULT}\n  fine meter {FINE}")
    print(f"  {'measured of each coil':34} coil  rms %  held %  interval over the first coil's")
    for name, meter, how in (
        ("settled reading, usual meter", DEFAULT, by_reading),
        ("settled reading, fine meter", FINE, by_reading),
        ("reading, scale, caliper", DEFAULT, by_scale),
        ("live readings, fine meter", FINE, by_readings),
    ):
        seen = wind(number, COILS, meter, how)
        for coil in (1, 2, 3, 4, 10, 20):
            asked = f"(asked {ASKED[coil]})" if coil in ASKED else "(asked rms <= 1.0 %)" if coil == 4 else ""
            print(
                f"  {name:34} {coil:4} {100 * seen.rms(coil):6.3f} {100 * seen.held(coil, coil):6.1f} "
                f"{seen.width(coil):9.3f}  {asked}"
            )
        print(f"  {name:34} 2-20 {'':6} {100 * seen.held(2, COILS):6.1f}")


def unknown(first_seed: int, number: int) -> None:
    """Unknown coils of AWG 39 to 44 in both grades and styles, with the mass of their wire and without."""
    print(f"  {number} unknown coils  right size first %  its odds said %  held %: turns  length  diameter")
    for weighed in (True, False):
        held, right, said = np.zeros(3), 0, 0.0
        for n in range(number):
            one = draw(first_seed + n, weighed=weighed)
            found = identify(one.outside)
            pairs = ((found.turns, one.turns), (found.length_m, one.metres), (found.bare_mm, one.bare_mm))
            held += [interval.low <= true <= interval.high for interval, true in pairs]
            right += found.sizes[0].name == one.gauge
            said += found.sizes[0].probability
        turns, length, bare = 100 * held / number
        first = f"{100 * right / number:17.1f} {100 * said / number:16.1f}"
        mass = "with mass" if weighed else "without mass"
        print(f"  {mass:17} {first} {turns:14.1f} {length:7.1f} {bare:9.1f}")
