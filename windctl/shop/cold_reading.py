"""One reading of a finished coil, taken back to 20 degrees C, with all it may be off by, source by source.

The meter shows V = (1 + gain) * (R20 * (1 + ALPHA * (T - bias + warmth - 20)) + leads) + its own scatter,
with T as the thermometer shows it and the coil warmer than the air by W * exp(-t/tau), t after it was wound.
Each source of error has a name; two readings with the same name in them are off by the same error, as far as
both feel it. Sources with different names are independent.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import exp, hypot, sqrt

from windctl.forecast.belief import (
    GAIN,
    LEADS,
    OVER_AIR,
    SHARPEST_REL,
    THERMOMETER,
    answer_gradient,
    moved,
    resistance,
)
from windctl.forecast.cooling import COOLING_REL, COOLING_S
from windctl.forecast.finish import Z95
from windctl.material.copper import ALPHA_20C
from windctl.profile.model import MachineProfile
from windctl.record.state import State

# How much of a thermometer's variance stays with it from one reading to the next; the rest is where it was
# put and how the air moved. Our judgement.
THERMOMETER_STAYS = 0.75
COOLED_MINUTES = 15.0  # five time constants: less than a hundredth of the warmth is left

GAIN_OF, THERMOMETER_OF, LEADS_OF = "gain of ", "thermometer of ", "leads of "
LEADS_ZEROED = "leads as zeroed"  # before this coil: no other reading is off by the same
WARMTH, COOLING = "warmth of the coil", "how fast it cools"
PLACING, OWN = "place of the thermometer", "scatter"
OF_ONE = (PLACING, OWN)  # errors of one reading alone


@dataclass(frozen=True, slots=True)
class Meter:
    """What a meter, its leads and the thermometer beside the coil may be off by, as standard deviations.

    `name` tells meters apart; `place` the thermometers. `over_air_k`: how much warmer a coil just wound is.
    """

    name: str
    place: str
    gain_rel: float
    noise_rel: float
    floor_ohm: float
    lead_ohm: float
    lead_sd_ohm: float
    celsius_sd: float
    over_air_k: float
    over_air_sd_k: float


@dataclass(frozen=True, slots=True)
class Source:
    """One thing a reading may be off by: its standard deviation in `unit`, and by how much of the resistance
    (relative, signed) the reading is off per unit of it."""

    name: str
    sd: float
    unit: str
    slope: float

    @property
    def rel(self) -> float:
        """Relative standard deviation of the resistance that comes of it, signed."""
        return self.slope * self.sd


@dataclass(frozen=True, slots=True)
class ColdReading:
    """`ohm` at 20 degrees C. `bare`: nothing else is joined to the coil. `label` names it to people, `number`
    tells it from others of its coil, from 1; 0 where it stands alone."""

    label: str
    when: str
    stage: str
    meter: str
    ohm: float
    sources: tuple[Source, ...]
    bare: bool = True
    number: int = 0

    @property
    def u95_ohm(self) -> float:
        """Half-width of its 95 % interval, every source in it."""
        return Z95 * self.rel * self.ohm

    @property
    def rel(self) -> float:
        """Relative standard uncertainty, every source in it."""
        return hypot(*(source.rel for source in self.sources))

    @property
    def rel_besides_instruments(self) -> float:
        """The same without the meter's gain and the thermometer, which are off for every coil alike."""
        return hypot(
            *(
                source.rel
                for source in self.sources
                if source.name != PLACING and not source.name.startswith((GAIN_OF, THERMOMETER_OF))
            )
        )


def meter_of(profile: MachineProfile) -> Meter:
    """The meter and the thermometer of a machine."""
    readings = profile.readings
    place = f"{profile.name} ({profile.bench})"
    return Meter(
        name=place,
        place=place,
        gain_rel=readings.gain_sd_pct / 100.0,
        noise_rel=readings.noise_pct / 100.0,
        floor_ohm=readings.floor_ohm,
        lead_ohm=readings.lead_ohm,
        lead_sd_ohm=readings.lead_sd_ohm,
        celsius_sd=readings.celsius_sd,
        over_air_k=readings.coil_over_air_k,
        over_air_sd_k=readings.coil_over_air_sd_k,
    )


def by_hand(
    meter: Meter,
    ohm: float,
    celsius: float,
    minutes: float | None,
    *,
    label: str = "",
    when: str = "",
    stage: str = "",
) -> ColdReading:
    """A reading of `ohm`, leads and all, with the thermometer at `celsius`, `minutes` after winding; None:
    long since.

    Raises ValueError for a resistance that is no more than the leads, or a temperature outside copper's law.
    """
    if ohm <= meter.lead_ohm:
        raise ValueError(f"{ohm:g} ohm is no more than the leads, {meter.lead_ohm:g} ohm")
    if not -100.0 <= celsius <= 300.0:
        raise ValueError(f"{celsius:g} °C is outside -100 to 300 °C, where copper's temperature law is used")
    age = None if minutes is None else 60.0 * minutes / COOLING_S
    left = 0.0 if age is None else exp(-age)
    coil = ohm - meter.lead_ohm
    warm = 1.0 + ALPHA_20C * (celsius - 20.0 + left * meter.over_air_k)
    at_20c = coil / warm
    per_kelvin = ALPHA_20C / warm
    sources = [
        Source(GAIN_OF + meter.name, meter.gain_rel, "", ohm / coil),
        Source(THERMOMETER_OF + meter.place, meter.celsius_sd * sqrt(THERMOMETER_STAYS), "K", -per_kelvin),
        Source(PLACING, meter.celsius_sd * sqrt(1.0 - THERMOMETER_STAYS), "K", -per_kelvin),
        Source(LEADS_OF + meter.name, meter.lead_sd_ohm, "ohm", 1.0 / coil),
        Source(OWN, hypot(meter.noise_rel * coil, meter.floor_ohm, SHARPEST_REL * coil), "ohm", 1.0 / coil),
    ]
    if age is not None and left > exp(-60.0 * COOLED_MINUTES / COOLING_S):
        sources.append(Source(WARMTH, meter.over_air_sd_k, "K", left * per_kelvin))
        excess = hypot(meter.over_air_k, meter.over_air_sd_k)
        sources.append(Source(COOLING, COOLING_REL, "", excess * left * age * per_kelvin))
    return ColdReading(label, when, stage, meter.name, at_20c, tuple(sources))


def by_record(state: State, meter: Meter, *, label: str = "", when: str = "") -> ColdReading | None:
    """What the winding itself says of the coil's resistance; None where nothing was read.

    The estimate's covariance with each common error tells how far that error is in it: the estimate R is off
    by -cov(R, e)/var(e) per unit of e, and by what is left over independently of all of them.
    """
    estimate, finished = state.estimate, state.finished
    if estimate is None or finished is None or estimate.used == 0:
        return None
    belief = moved(estimate.belief, finished.turns, estimate.walk)
    ohm, sd = resistance(belief)
    if not ohm > 0.0:
        return None
    gradient = answer_gradient(belief)
    prior = estimate.prior  # its leads are those that were taken off
    leads = LEADS_OF + meter.name if state.zeroed is None else LEADS_ZEROED

    def slope(state_of: int, error_sd: float) -> float:
        if error_sd <= 0.0:
            return 0.0
        with_it = sum(g * row[state_of] for g, row in zip(gradient, belief.cov, strict=True))
        return -with_it / error_sd**2 / ohm

    by_kelvin = slope(THERMOMETER, prior.celsius_sd)
    stays, comes = sqrt(THERMOMETER_STAYS), sqrt(1.0 - THERMOMETER_STAYS)
    shared = (
        Source(GAIN_OF + meter.name, prior.gain_sd, "", slope(GAIN, prior.gain_sd)),
        Source(THERMOMETER_OF + meter.place, prior.celsius_sd * stays, "K", by_kelvin),
        Source(PLACING, prior.celsius_sd * comes, "K", by_kelvin),
        Source(leads, prior.offset_sd, "ohm", slope(LEADS, prior.offset_sd)),
        Source(WARMTH, prior.coil_over_air_sd, "K", slope(OVER_AIR, prior.coil_over_air_sd)),
    )
    rest = (sd / ohm) ** 2 - sum(source.rel**2 for source in shared)
    own = Source(OWN, ohm * sqrt(max(rest, SHARPEST_REL**2)), "ohm", 1.0 / ohm)
    return ColdReading(label, when, "on-machine", meter.name, ohm, (*shared, own))
