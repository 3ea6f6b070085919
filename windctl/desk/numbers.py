"""How the faces write numbers: as paper and every other room does, by `windctl.numbers`."""

from windctl.numbers import (
    apart,
    counted,
    duration,
    grouped,
    ohm,
    short_digest,
    signed_mm,
    turns,
    with_uncertainty,
)

__all__ = [
    "apart",
    "counted",
    "duration",
    "grouped",
    "ohm",
    "short_digest",
    "signed_mm",
    "turns",
    "with_uncertainty",
]
