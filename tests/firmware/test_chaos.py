"""The real core at the end of a line that loses, flips, repeats and delays a fifth of all frames each."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from pathlib import Path

import pytest

from tests.conftest import LONG
from tests.firmware.chaos import ChipMachine, many, on_core
from tests.protocol.chaos import Program

Elf = Callable[..., Path]


def check(total: Counter[str], coils: int) -> None:
    """As much befell as should, and every coil got done."""
    assert total["coils"] == coils
    for befell in ("lost", "flipped", "repeated", "delayed"):
        assert 0.15 < total[befell] / total["frames"] < 0.3, befell
    assert total["starts"] >= coils
    assert total["said again"] > 10 * coils


def test_on_the_core_nothing_moves_that_must_not(cc: str) -> None:
    check(many(range(3), on_core), 3)


@pytest.mark.long
@pytest.mark.timeout(2400)
def test_five_hundred_coils_on_the_core(cc: str) -> None:
    total = many(range(1000, 1500), on_core)
    check(total, 500)
    assert min(total[what] for what in ("power lost", "unplugged", "trips cleared")) > 100


@pytest.mark.timeout(3600)
def test_on_the_chip_nothing_moves_that_must_not(chip: Elf) -> None:
    """A short one of the twenty coils that the long form winds."""
    elf = chip()
    seeds = range(2000, 2020) if LONG else range(2004, 2005)
    total = many(seeds, lambda random: ChipMachine(Program(random), elf))
    check(total, len(seeds))
