"""Leads and contact by themselves: read with nothing between them before a coil's first turn.

What is read is everything that stands in each later reading besides coil and wire: leads, contact, and the
meter's own zero. So a zeroing is an observation of one state of the belief, the leads, as this meter shows
them. It takes the place of what the profile says and is not averaged with it: whoever zeroes has other leads
in hand than the profile knew of, or does not trust its figure, and a mean would draw one towards the other.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import hypot, isfinite, sqrt
from statistics import fmean, stdev

from windctl.forecast.estimator import Estimate, begin
from windctl.plan.prior import Prior

LEAST_READINGS = 8

# How far the contact on the wire may be from the contact on the other lead: a clip or a spring on bare copper
# comes back to within some hundredths of an ohm. Our judgement; no later figure of the leads is surer.
CONTACT_SD_OHM = 0.05

_SEVERAL = 3.0  # times what the profile allows: beyond it something else is between the leads; our judgement
_ALLOWED_SD = 2.0
_STEADY_SD = 2.0  # of the profile's scatter: 8 steady readings scatter by more once in 4500


@dataclass(frozen=True, slots=True)
class Leads:
    """What leads and contact read: ohm, and its standard uncertainty without `CONTACT_SD_OHM`.

    `steady`: the readings scatter no more than the profile says of this meter.
    """

    ohm: float
    sd: float
    steady: bool


def leads_of(ohms: Sequence[float], floor_ohm: float) -> Leads:
    """Leads and contact from readings at rest with nothing between them.

    Their mean's own scatter is a type A evaluation (Guide to the Expression of Uncertainty in Measurement,
    JCGM 100:2008, 4.2, with the widening for few readings of its supplement JCGM 101:2008, 6.4.9, from
    memory). The meter's floor does not go away with readings: near zero its resolution is off by the same in
    each. Raises ValueError for fewer than `LEAST_READINGS`, and for one that is not finite.
    """
    n = len(ohms)
    if n < LEAST_READINGS or not all(map(isfinite, ohms)):
        raise ValueError(f"{n} readings, {LEAST_READINGS} finite ones are needed")
    scatter = stdev(ohms)
    own = scatter * sqrt((n - 1) / (n - 3) / n)
    steady = scatter <= max(_STEADY_SD * floor_ohm, CONTACT_SD_OHM)
    return Leads(max(fmean(ohms), 0.0), hypot(own, floor_ohm), steady)


def most_leads_ohm(prior: Prior) -> float:
    """Above this, ohm, it is no leads that were read: a coil between them, or a contact that has gone bad."""
    allowed = prior.offset_ohm + _ALLOWED_SD * prior.offset_sd
    return _SEVERAL * allowed + _ALLOWED_SD * max(prior.floor_ohm, CONTACT_SD_OHM)


def zeroed(estimate: Estimate, ohm: float, sd: float) -> Estimate:
    """The estimate of a coil whose leads were read by themselves: `ohm`, with standard uncertainty `sd`.

    Before the first reading the leads are independent of all other states, so the observation changes theirs
    alone, and another one later replaces it. The state is never surer than `CONTACT_SD_OHM`.
    Raises ValueError once a reading has been taken in, and for figures that are none.
    """
    if estimate.used or estimate.gated:
        raise ValueError("leads are zeroed before the first reading of the coil")
    if not (isfinite(ohm) and isfinite(sd) and ohm >= 0.0 and sd >= 0.0):
        raise ValueError(f"leads of {ohm:g} ohm, give or take {sd:g} ohm, cannot be")
    return begin(replace(estimate.prior, offset_ohm=ohm, offset_sd=hypot(sd, CONTACT_SD_OHM)))
