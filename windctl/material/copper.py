"""Annealed copper, the standard material of IEC 60028.

Resistivity and temperature coefficient as cited second-hand; the density is from memory.
"""

from __future__ import annotations

RESISTIVITY_20C = 1 / 58  # ohm mm2/m at 20 degrees C
ALPHA_20C = 0.00393  # 1/K, relative to 20 degrees C, at constant mass
DENSITY_G_CM3 = 8.89  # g/cm3 at 20 degrees C

_COLDEST_CELSIUS = -100.0
_WARMEST_CELSIUS = 300.0


def _factor(celsius: float) -> float:
    """R(celsius) / R(20). The straight line is an engineering law: outside this range it is refused."""
    if not _COLDEST_CELSIUS <= celsius <= _WARMEST_CELSIUS:
        raise ValueError(
            f"{celsius:g} degrees C is outside {_COLDEST_CELSIUS:g} to {_WARMEST_CELSIUS:g} degrees C, "
            "where copper's temperature law is used"
        )
    return 1.0 + ALPHA_20C * (celsius - 20.0)


def to_20c(ohm: float, celsius: float) -> float:
    """The resistance at 20 degrees C of copper that has `ohm` at `celsius`."""
    return ohm / _factor(celsius)


def from_20c(ohm20: float, celsius: float) -> float:
    """The resistance at `celsius` of copper that has `ohm20` at 20 degrees C."""
    return ohm20 * _factor(celsius)
