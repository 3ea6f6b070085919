"""Priors for tests whose figures are worked out by hand."""

from __future__ import annotations

from dataclasses import replace
from math import pi

from windctl.plan.prior import Prior

OHM_PER_M = 5.4716
CORE_M = (2 * 50.0 + 2 * pi * 3.0) / 1000.0  # straight 50 mm, end radius 3 mm
BUILD_PER_TURN_M = 3.5e-3 / 8000  # 3.5 mm of build in all


def certain(per_turn: float, growth: float, turns: float = 8000.0) -> Prior:
    """Nothing is unknown and nothing is off: the start of every prior below."""
    return Prior(
        ohm_per_turn=per_turn, growth=growth, var_ohm_per_turn=0.0, var_growth=0.0, cov=0.0,
        growth_walk_rel=0.0, turns=turns, offset_ohm=0.0, offset_sd=0.0, gain_sd=0.0, celsius_sd=0.0,
        coil_over_air_k=0.0, coil_over_air_sd=0.0, noise_rel=0.0, floor_ohm=0.0, contact_length_ohm=0.0,
        wire_walk_rel=0.0, wire_slope_rel=0.0,
    )  # fmt: skip


def worked() -> Prior:
    """The worked bobbin: 4 % on ohm per metre, common to both terms, and 10 % on the build per turn."""
    per_turn = OHM_PER_M * CORE_M
    growth = 2 * pi * OHM_PER_M * BUILD_PER_TURN_M
    return replace(
        certain(per_turn, growth),
        var_ohm_per_turn=(0.04 * per_turn) ** 2,
        var_growth=(0.04**2 + 0.10**2) * growth**2,
        cov=0.04**2 * per_turn * growth,
    )


def shop() -> Prior:
    """The worked bobbin before a default machine: its meter, its thermometer, its contact."""
    return replace(
        worked(), growth_walk_rel=0.05, offset_ohm=0.5, offset_sd=0.3, gain_sd=0.003, celsius_sd=0.5,
        coil_over_air_k=0.7, coil_over_air_sd=0.7, noise_rel=0.001, floor_ohm=0.2, contact_length_ohm=0.82,
        wire_walk_rel=0.0015, wire_slope_rel=0.0017,
    )  # fmt: skip
