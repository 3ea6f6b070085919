"""One reading of the coil's resistance, as it was taken."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Reading:
    """Raw resistance at the temperature of the moment, after `turn` turns.

    A turning reading is an average; its `turn` is the middle of the time it was averaged over.
    """

    turn: float
    ohm: float  # raw, at that temperature; inf for an open circuit
    celsius: float  # what the thermometer beside the coil shows
    sd_ohm: float | None = None  # its own standard uncertainty; None: what the profile says of the meter
    resting: bool = False  # the spindle stands, and the value has settled
    seconds: float | None = None
    warmth: float = 1.0  # share left of the coil's excess temperature over the air: 1 just wound, 0 cooled


def canonical_key(reading: Reading) -> tuple[float, float, float, float, float, bool, float]:
    """A total order over readings that does not depend on the order in which they were handed in."""
    return (
        reading.turn,
        -1.0 if reading.seconds is None else reading.seconds,
        reading.ohm,
        reading.celsius,
        -1.0 if reading.sd_ohm is None else reading.sd_ohm,
        reading.resting,
        reading.warmth,
    )
