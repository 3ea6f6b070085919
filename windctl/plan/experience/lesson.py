"""What was measured of one finished coil, each figure with its own uncertainty."""

from __future__ import annotations

from dataclasses import dataclass

from windctl.plan.experience.basis import Basis


@dataclass(frozen=True, slots=True)
class Resistance:
    """The finished coil at 20 degrees C, as its meter and thermometer show it. `rel`: what one such reading
    is off by itself (noise, leads, warmth); what the instruments have in common with every coil's reading
    stands in the lesson."""

    ohm: float
    rel: float


@dataclass(frozen=True, slots=True)
class Share:
    """Which part of the resistance the growth of the turns has added, from the curve of the live readings.

    The meter's gain and the thermometer do not touch it.
    """

    part: float
    sd: float


@dataclass(frozen=True, slots=True)
class Mass:
    """Of the wire on the bobbin, copper and enamel, g."""

    grams: float
    sd: float


@dataclass(frozen=True, slots=True)
class Build:
    """From the core to the winding's surface at the ends of the core, by caliper, mm."""

    mm: float
    sd: float


Measured = Resistance | Share | Mass | Build


@dataclass(frozen=True, slots=True)
class Lesson:
    """One finished coil.

    `spool` is empty where nobody said, `measured` where nothing was: then it only took wire. `meter_rel`:
    what the bench's meter and thermometer are off by for every coil alike.
    """

    coil: str
    bench: str
    spool: str
    basis: Basis
    turns: float
    meter_rel: float
    measured: tuple[Measured, ...]
    simulated: bool = False  # such coils teach no real bench

    @property
    def source(self) -> str:
        """The spool, or one of the coil's own."""
        return self.spool or f"coil {self.coil}"

    @property
    def metres(self) -> float:
        """Wire that it took, as planned."""
        return self.basis.coil.wire_length_m(self.turns)
