"""Round numbers along an axis."""

from __future__ import annotations

import math


def round_steps(low: float, high: float, most: int) -> list[float]:
    """At most `most` (at least 2) multiples of 1, 2 or 5 times a power of ten within low..high."""
    if not (math.isfinite(low) and math.isfinite(high)) or high <= low:
        return []
    power = 10.0 ** math.floor(math.log10((high - low) / max(most, 2)))
    for factor in (1, 2, 5, 10, 20, 50):
        step = power * factor
        first = math.ceil(low / step - 1e-9)
        count = math.floor(high / step + 1e-9) - first + 1
        if count <= max(most, 2):
            return [(first + place) * step for place in range(count)]
    return []
