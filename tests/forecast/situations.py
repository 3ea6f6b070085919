"""The situations that the forecast is judged in, and the rms error that each is to stay within."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from tests.forecast.scoring import Floats
from tests.forecast.truth import (
    DEFAULT,
    FINE,
    PERIODIC,
    PINK,
    SHAPES,
    TURNS,
    Instruments,
    Truth,
    drifting,
    with_bounce,
)
from windctl.record.ending import SETTLED_ENOUGH

GAUGE, MEASURED = Truth(), Truth(wire_sd=0.005)
EVEN = Truth(packing=(0.67, 0.80))
EVERY = 5.0  # turns between live readings: the simulated machine takes 1385 on a coil of 7447 turns


@dataclass(frozen=True)
class Situation:
    """Readings at `turns`; judged at each of `stages` (part of the coil, rms asked for or None)."""

    name: str
    truth: Truth
    meter: Instruments
    turns: Floats
    stages: tuple[tuple[float, float | None], ...]
    resting: bool = False
    cold: bool = False

    @property
    def at(self) -> list[float]:
        """The stages in turns."""
        return [part * TURNS for part, _ in self.stages]


def live(until: float, every: float = EVERY) -> Floats:
    return np.arange(every, until * TURNS + 1.0, every)


def checks(*parts: float) -> Floats:
    return np.array(parts) * TURNS


def situations(every: float = EVERY) -> tuple[Situation, ...]:
    """The table's rows, with a live reading every so many turns.

    A settled final reading is as many readings as a coil is judged by where the contact takes them; by hand
    it is one.
    """
    early, late = (0.125, None), (0.9, None)
    usual = (early, (0.25, 0.0028), (0.5, 0.0012), (0.75, 0.00065), late)
    unasked = tuple((part, None) for part, _ in usual)
    settled = np.full(SETTLED_ENOUGH, float(TURNS))
    return (
        Situation("none, gauge table only", GAUGE, FINE, checks(), ((0.0, 0.045),)),
        Situation("none, spool measured to 0.5 %", MEASURED, FINE, checks(), ((0.0, 0.014),)),
        Situation("one check, fine", GAUGE, FINE, checks(0.5), ((0.5, 0.0060),), resting=True),
        Situation(
            "checks at 30 and 85 %, fine",
            GAUGE,
            FINE,
            checks(0.3, 0.85),
            ((0.3, None), (0.85, 0.00085)),
            resting=True,
        ),
        Situation("live, fine", GAUGE, FINE, live(0.9, every), usual),
        Situation("live, fine, 2 % bounce", GAUGE, with_bounce(FINE), live(0.9, every), unasked),
        Situation("live, fine, even lay", EVEN, FINE, live(0.9, every), unasked),
        Situation(
            "settled, 0.5 K, 0.3 %, cooled",
            GAUGE,
            DEFAULT,
            settled,
            ((1.0, 0.0038),),
            resting=True,
            cold=True,
        ),
        Situation("the same, still warm", GAUGE, DEFAULT, settled, ((1.0, 0.0048),), resting=True),
        Situation(
            "cooled, one reading by hand",
            GAUGE,
            DEFAULT,
            checks(1.0),
            ((1.0, 0.0038),),
            resting=True,
            cold=True,
        ),
        Situation("still warm, one by hand", GAUGE, DEFAULT, checks(1.0), ((1.0, 0.0048),), resting=True),
    )


# Truths that the prior does not hold: other shapes, lasting noise, drifts of more than it is told.
OUTSIDE = (
    ("other shapes", SHAPES, FINE),
    ("other shapes, pink noise", SHAPES, PINK),
    ("pink noise", GAUGE, PINK),
    ("periodic noise", GAUGE, PERIODIC),
    ("drifts twice as large", drifting(2.0), FINE),
    ("drifts three times as large", drifting(3.0), FINE),
    ("drifts five times as large", drifting(5.0), FINE),
)
