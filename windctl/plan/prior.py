"""What is believed about a coil before its first turn, in the form the forecast starts from."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Prior:
    """Prior of R20(n) = ohm_per_turn * n + growth * n**2 / 2, and of the errors of its readings.

    Both coefficients are at 20 degrees C; rho is in both, so they are correlated. sd_* are standard
    deviations.
    """

    ohm_per_turn: float  # ohm per turn at the core: rho * P0
    growth: float  # ohm per turn per turn: 2 * pi * c * k * rho
    var_ohm_per_turn: float
    var_growth: float
    cov: float
    growth_walk_rel: float  # relative sd of growth accumulated over the whole coil (packing drifts)
    turns: float  # planned turns, the scale of that walk
    offset_ohm: float  # leads and contact
    offset_sd: float
    gain_sd: float  # relative, meter
    celsius_sd: float  # K, thermometer bias
    coil_over_air_k: float
    coil_over_air_sd: float
    noise_rel: float  # relative, each reading
    floor_ohm: float  # resolution and contact, each reading
    contact_length_ohm: float  # wire between coil and contact, subtracted from each reading
    # relative sd over the whole coil: what ohm per metre gathers by wandering, and by a steady slope
    wire_walk_rel: float = 0.0015
    wire_slope_rel: float = 0.0017
    # covariance of both coefficients, relative, with how much too much the instruments show at 20 degrees C:
    # below 0 where the wire is known from earlier coils that the same instruments measured
    meter_cov: float = 0.0
