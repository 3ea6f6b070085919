"""What is learnt from lots of coils that are not its model (`lots.py`): how far the next coil is foreseen,
and that the interval holds.

The long form takes the full number of lots, the short one enough to notice a mistake. None of these seeds was
used while the figures in `unknowns.py` were chosen.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import log, sqrt

import numpy as np
import pytest

from tests.conftest import LONG
from tests.forecast.truth import DEFAULT, FINE, OHM_PER_M, Instruments, Truth, prior_for
from tests.plan.experience.lots import TURNS, Lots, OfLot, basis, lesson, lot, settled
from windctl.forecast.estimator import begin, update
from windctl.forecast.finish import finish_at
from windctl.forecast.taught import open_minded, taught
from windctl.plan.beliefs import Believed
from windctl.plan.experience.fold import Experience, learn
from windctl.plan.experience.lesson import Build, Lesson, Mass, Measured
from windctl.plan.experience.outlook import outlook
from windctl.plan.experience.spool import PieceMeasured, Spool
from windctl.profile.model import MachineProfile

FIRST_SEED = 70_000
USUAL = Lots()
SPOOL = Spool("s1", gauge="AWG 42", enamel="grade 1")


@dataclass(frozen=True)
class Foreseen:
    """Of every coil of every lot, before it was wound: relative error, half-width of the 95 % interval."""

    errors: np.ndarray
    halves: np.ndarray

    def rms(self, coil: int) -> float:
        return float(np.sqrt(np.mean(self.errors[:, coil - 1] ** 2)))

    def width(self, coil: int) -> float:
        return float(np.median(self.halves[:, coil - 1] / self.halves[:, 0]))

    def held(self, first: int, last: int) -> float:
        part = slice(first - 1, last)
        return float(np.mean(np.abs(self.errors[:, part]) <= self.halves[:, part]))


def foresee(known: Experience, coming: Lesson) -> tuple[float, float]:
    """Resistance at 20 degrees C of a coil to come, and its standard deviation."""
    believed = Believed(coming.basis, outlook(known, coming))
    return believed.ohm_per_m * believed.coil.wire_length_m(TURNS), believed.resistance_sd_ohm(TURNS)


def by_reading(one: OfLot) -> tuple[Measured, ...]:
    """A settled reading at the end, as a shop has it that takes no other."""
    return (settled(one),)


def by_readings(one: OfLot) -> tuple[Measured, ...]:
    """Live readings all along, and settled ones at the end, read once more without any prior knowledge."""
    estimate = begin(open_minded(prior_for(Truth(), one.coil.meter), basis()))
    turns = np.arange(200.0, TURNS + 1.0, 200.0)
    for reading in (*one.coil.readings(turns), *one.coil.readings(np.full(3, float(TURNS)), resting=True)):
        estimate, _ = update(estimate, reading)
    return taught(estimate, TURNS)


def by_scale(one: OfLot) -> tuple[Measured, ...]:
    """A settled reading, a scale and a caliper, whose jaws lie on the highest heaps."""
    rng = one.coil.rng
    jaws = one.build_mm * rng.uniform(0.97, 1.10) + 0.1 * float(rng.standard_normal())
    return (settled(one), Mass(one.grams + 0.02 * float(rng.standard_normal()), 0.02), Build(jaws, 0.1))


def wind(lots: int, coils: int, meter: Instruments, how=by_reading, laws: Lots = USUAL) -> Foreseen:
    errors, halves = np.zeros((lots, coils)), np.zeros((lots, coils))
    for n in range(lots):
        lessons: list[Lesson] = []
        for i, one in enumerate(lot(FIRST_SEED + n, coils, laws, meter)):
            ohm, sd = foresee(learn(lessons), lesson(i, (), meter, basis()))
            errors[n, i], halves[n, i] = ohm / one.ohm - 1.0, 1.96 * sd / one.ohm
            lessons.append(lesson(i, how(one), meter, basis()))
    return Foreseen(errors, halves)


def test_lots_of_twenty_coils_from_one_spool_gauge_start() -> None:
    """The start-of-coil interval shrinks to 0.30 of the first coil's with the second coil and to 0.24 with
    the twentieth, and holds in 90 to 99 %."""
    seen = wind(100 if LONG else 25, 20, DEFAULT)
    assert seen.width(2) <= 0.30
    assert seen.width(20) <= 0.24
    assert 0.90 <= seen.held(2, 20) <= 0.99
    assert seen.rms(4) <= 0.010 * (1.0 if LONG else 1.3)


@pytest.mark.parametrize(("how", "meter"), [(by_readings, FINE), (by_scale, DEFAULT)], ids=["live", "scale"])
def test_however_the_coils_were_measured(how, meter: Instruments) -> None:
    seen = wind(100 if LONG else 12, 6, meter, how)
    assert seen.width(2) <= 0.30
    assert seen.width(6) <= 0.24
    assert (0.90 if LONG else 0.86) <= seen.held(2, 6) <= (0.99 if LONG else 1.0)
    assert seen.rms(4) <= 0.010 * (1.0 if LONG else 1.5)


def test_a_measured_spool() -> None:
    """Ohm per metre known to 0.5 %: the first coil's resistance within 1.4 % rms."""
    errors, held = [], []
    for n in range(1000 if LONG else 100):
        (one,) = lot(FIRST_SEED + 1000 + n, 1, Lots(packing_sd=0.0))  # a lot of one
        start = one.coil.wire * OHM_PER_M * 1.004  # the basis has the mean stretch of wound wire in it
        piece = start * (1.0 + 0.005 * float(one.coil.rng.standard_normal()))
        nominal = SPOOL.wire().ohm_per_m / basis().ohm_per_m
        known = learn([PieceMeasured("s1", piece * nominal, 0.005)], [SPOOL])
        ohm, sd = foresee(known, lesson(0, (), DEFAULT, basis()))
        errors.append(ohm / one.ohm - 1.0)
        held.append(abs(errors[-1]) <= 1.96 * sd / one.ohm)
    assert sqrt(np.mean(np.square(errors))) <= 0.014 * (1.0 if LONG else 1.2)
    assert (0.91 if LONG else 0.87) <= np.mean(held) <= 0.99


def test_what_was_learnt_by_a_meter_is_doubted_as_the_meter_is() -> None:
    """A forecast that starts from three coils which the same meter measured, and one settled reading by it:
    the meter's own error is in both, and averages away in neither."""
    held, scaled = [], []
    readings = MachineProfile(format=1).readings
    for n in range(300 if LONG else 60):
        lessons: list[Lesson] = []
        for i, one in enumerate(lot(FIRST_SEED + 3000 + n, 4)):
            coming = lesson(i, (), DEFAULT, basis())
            if i < 3:
                lessons.append(lesson(i, by_reading(one), DEFAULT, basis()))
                continue
            prior = Believed(coming.basis, outlook(learn(lessons), coming)).prior(TURNS, readings)
            estimate = begin(prior)
            for reading in one.coil.readings(np.array([float(TURNS)]), resting=True):
                estimate, _ = update(estimate, reading)
            finish = finish_at(estimate, TURNS)
            held.append(finish.low <= one.ohm <= finish.high)
            scaled.append((finish.ohm - one.ohm) / finish.sd)
    assert (0.92 if LONG else 0.88) <= np.mean(held) <= (0.985 if LONG else 1.0)
    assert 0.8 <= sqrt(np.mean(np.square(scaled))) <= (1.05 if LONG else 1.2)


def test_how_dense_the_lay_is_carries_over_to_another_spool() -> None:
    """Four coils from one spool teach the lay and the bobbin; the first from another spool then has only its
    wire to be unsure of. Its build, which no ohmmeter sees, is foreseen as well."""
    apart, scaled = [], []
    for n in range(200 if LONG else 40):
        lessons = [
            lesson(i, by_readings(one), FINE, basis())
            for i, one in enumerate(lot(FIRST_SEED + 5000 + n, 5, meter=FINE))
        ]
        last = list(lot(FIRST_SEED + 5000 + n, 5, meter=FINE))[-1]
        taught_growth = outlook(learn(lessons[:-1]), lessons[-1])
        blank = outlook(Experience(), lessons[-1])
        truly = log(last.build_mm * last.crown / (basis().build_per_turn_mm * basis().crown * TURNS))
        apart.append(taught_growth.var_growth / blank.var_growth)
        scaled.append((taught_growth.growth - truly) / sqrt(taught_growth.var_growth))
    assert np.median(apart) < 0.35  # of the variance: what is left is how one coil differs from the next
    assert 0.8 <= sqrt(np.mean(np.square(scaled))) <= 1.25


def test_a_truth_from_outside_the_family() -> None:
    """Wire that slopes three times as steeply and coils that differ twice as much: the twentieth coil is
    still foreseen better than from the table, and the interval is wrong in at most every third coil."""
    odd = Lots(wire_slope=(0.006, 0.009), core_sd=0.01, packing_sd=0.06)
    seen = wind(50 if LONG else 10, 12, DEFAULT, laws=odd)
    assert seen.rms(12) < 0.6 * seen.rms(1)
    assert seen.held(2, 12) >= 0.60
