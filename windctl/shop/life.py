"""A coil's readings from the machine to its return, which of them belong together, and what they come to.

Readings that do not show a change are of one resistance and are taken together. One that shows a change
begins another group; a later one that agrees with an older group goes back to it, so that a slip of the pen
stays alone. With something joined to the coil (assembled) a reading is of both, and is compared with its
like.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

from windctl.profile.model import MachineProfile
from windctl.record.addenda import Addendum, CoilMeasured
from windctl.record.events import CoilStarted, Event
from windctl.record.fold import replay
from windctl.record.state import State
from windctl.shop.cold_reading import ColdReading, Meter, by_hand, by_record, meter_of
from windctl.shop.still_reads import WORTH_TELLING_PCT, ColdValue, Still, cold_value, still

RECORD = "the record"
JOINED = ("assembled",)  # stages at which something else is joined to the coil


@dataclass(frozen=True, slots=True)
class Life:
    """All readings in order of time; what each says against those from when the coil was made, None for the
    first; the cold value as made, and as it is now (the same, unless it changed). None: nothing was read."""

    readings: tuple[ColdReading, ...]
    stills: tuple[Still | None, ...]
    made: ColdValue | None
    now: ColdValue | None

    @property
    def changed(self) -> bool:
        """What it reads now is another resistance than when it was made."""
        return self.made != self.now


def life(events: Iterable[Event], facts: Iterable[Addendum], change_pct: float = WORTH_TELLING_PCT) -> Life:
    """Of a coil's recorded events, and what was said since. `change_pct`: the least change that matters."""
    state = replay(tuple(events))
    return life_of(readings_of(state, facts), change_pct)


def readings_of(state: State, facts: Iterable[Addendum]) -> tuple[ColdReading, ...]:
    """Of a coil whose facts are folded into `state`: the record's own, then those taken by hand."""
    if state.started is None:
        return ()
    own = meter_of(profile_of(state.started))
    first = by_record(state, own, label=RECORD, when=state.started.wall_time)
    found = [] if first is None else [first]
    hand = [fact for fact in facts if isinstance(fact, CoilMeasured) and fact.ohm is not None]
    found += [reading for fact in hand if (reading := reading_of(fact, own)) is not None]
    return tuple(replace(reading, number=n) for n, reading in enumerate(found, 1))


def reading_of(fact: CoilMeasured, own: Meter) -> ColdReading | None:
    """What was measured by hand, cold; None where it was no resistance. `own`: the meter of the coil's
    machine, which a fact of an older version was taken with."""
    if fact.ohm is None or fact.celsius is None:
        return None
    label = f"{fact.stage or 'by hand'}, {fact.wall_time[:16].replace('T', ' ')}"
    reading = by_hand(
        meter_in(fact) or own,
        fact.ohm,
        fact.celsius,
        fact.minutes,
        label=label,
        when=fact.wall_time,
        stage=fact.stage,
    )
    return replace(reading, bare=fact.stage not in JOINED)


def meter_in(fact: CoilMeasured) -> Meter | None:
    """The meter as it was trusted when the fact was kept; None where an older version did not say."""
    if (
        fact.gain_rel is None
        or fact.noise_rel is None
        or fact.floor_ohm is None
        or fact.lead_ohm is None
        or fact.lead_sd_ohm is None
        or fact.celsius_sd is None
        or fact.over_air_k is None
        or fact.over_air_sd_k is None
    ):
        return None
    return Meter(
        name=fact.meter,
        place=fact.thermometer,
        gain_rel=fact.gain_rel,
        noise_rel=fact.noise_rel,
        floor_ohm=fact.floor_ohm,
        lead_ohm=fact.lead_ohm,
        lead_sd_ohm=fact.lead_sd_ohm,
        celsius_sd=fact.celsius_sd,
        over_air_k=fact.over_air_k,
        over_air_sd_k=fact.over_air_sd_k,
    )


def profile_of(started: CoilStarted) -> MachineProfile:
    """The machine's profile as the record has it."""
    return MachineProfile.model_validate_json(started.profile_json)


def life_of(readings: Sequence[ColdReading], change_pct: float = WORTH_TELLING_PCT) -> Life:
    """What readings in order of time come to."""
    groups: list[list[ColdReading]] = []
    joined: list[ColdReading] = []
    stills: list[Still | None] = []
    latest: list[ColdReading] = []
    for reading in readings:
        made = joined if not reading.bare and joined else groups[0] if groups else []
        stills.append(_sharpest(made, reading, change_pct) if made else None)
        if not reading.bare:
            joined.append(reading)
            continue
        for group in reversed(groups):
            said = _sharpest(group, reading, change_pct)
            if said.statement != "changed":
                latest = group
                break
        else:
            latest = []
            groups.append(latest)
        latest.append(reading)
    if not groups:
        return Life(tuple(readings), tuple(stills), None, None)
    first = cold_value(groups[0])
    return Life(tuple(readings), tuple(stills), first, first if latest is groups[0] else cold_value(latest))


def _sharpest(before: Sequence[ColdReading], after: ColdReading, change_pct: float) -> Still:
    """Against the one of several readings that shares the most with it."""
    return min((still(one, after, change_pct) for one in before), key=lambda said: said.u95_ohm)
