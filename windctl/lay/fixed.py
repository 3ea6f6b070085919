"""From a recipe's decimal numbers to the integers that a program is made of, the same on every computer.

A recipe's number is taken as the shortest decimal that reads back as it (what `repr` writes, which is
what the winder typed), as an exact fraction; arithmetic stays in fractions until one rounding, half to
even, to an integer. No binary floating-point arithmetic takes part.
"""

from __future__ import annotations

from fractions import Fraction

SUB_BITS = 16
SUB = 1 << SUB_BITS  # sub-steps in one guide step: positions and pitches are counted in these


def exact(value: float) -> Fraction:
    """The shortest decimal that reads back as `value`, exactly. ValueError for what is not finite."""
    return Fraction(repr(value))


def nearest(value: Fraction) -> int:
    """The nearest integer, halves to even."""
    return round(value)


def whole_steps(mm: Fraction, steps_per_mm: Fraction) -> int:
    """A length in whole guide steps."""
    return nearest(mm * steps_per_mm)


def sub_steps(mm: Fraction, steps_per_mm: Fraction) -> int:
    """A length in sub-steps."""
    return nearest(mm * steps_per_mm * SUB)
