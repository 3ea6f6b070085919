"""Figures as people type them: either decimal sign, and `k` for thousand behind a resistance."""

from __future__ import annotations

import math
import re

_OHM = re.compile(r"\s*(\d+(?:[.,]\d*)?|[.,]\d+)\s*(k?)\s*(?:ohm)?\s*", re.IGNORECASE)


def parse_ohm(text: str) -> float:
    """`7946`, `7.946k`, `7,946 k`: a resistance in ohm. Raises ValueError for anything else and for zero."""
    match = _OHM.fullmatch(text)
    if match is None:
        raise ValueError(f"{text!r} is not a resistance: write 7946, 7.946k or 7,946k")
    value = float(match[1].replace(",", ".")) * (1000.0 if match[2] else 1.0)
    if value <= 0 or not math.isfinite(value):
        raise ValueError(f"a resistance is above 0 ohm, not {text.strip()}")
    return value
