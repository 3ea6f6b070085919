"""What chance makes of one spool, one coil and one set of instruments: every distribution in one table.

The spread of a wire, a packing or a meter is the one that recipe, profile and wire table state; the rest is
common practice without a source, chosen so that a virtual coil goes wrong the ways a real one does. A bench
keeps its meter, thermometer and axis from coil to coil, a spool its wire; each coil has a bobbin and a lay of
its own.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from windctl.machine.plant.draws import Draws
from windctl.machine.plant.spec import PlantSpec


@dataclass(frozen=True, slots=True)
class Law:
    """How a quantity is drawn: normal, sd `spread`, again beyond `cut` sd; or uniform, centre +- spread."""

    name: str
    shape: Literal["normal", "uniform"]
    centre: float
    spread: float
    unit: str
    about: str
    cut: float = 2.0

    def draw(self, seed: int, of: str) -> float:
        """The value that `seed` gives for the thing named `of`."""
        draws = Draws(seed, f"{of}/{self.name}")
        if self.shape == "normal":
            return draws.normal(self.centre, self.spread, self.cut)
        return draws.uniform(self.centre - self.spread, self.centre + self.spread)


SPOOL_LAWS = (
    Law("ohm_per_m", "normal", 0.0, 1.0, "sd of the wire", "off nominal: 4 % cut at 8 % from a table"),
    Law("overall", "uniform", 0.0, 2.0, "sd of the wire", "anywhere in its grade, which is 4 sd wide"),
    Law("slope", "normal", 0.0, 0.0025, "per km", "thinner or thicker towards the spool's end"),
    Law("walk", "uniform", 0.0015, 0.001, "per sqrt(km)", "random walk of ohm per metre"),
)

COIL_LAWS = (
    Law("perimeter", "normal", 0.0, 1.0, "sd of the perimeter", "moulded or wrapped, not exact"),
    Law("packing", "normal", 0.0, 1.0, "sd of the packing", "mean over the coil"),
    Law("loosening", "uniform", 0.05, 0.05, "relative", "packing lost from the first turn to the last"),
    Law("bulge", "uniform", 0.15, 0.10, "relative", "how much the long sides' build exceeds the mean"),
    Law("slide", "uniform", 1.2, 0.5, "mm/mm", "steepest; turns stacked like pipes stand at 60 degrees"),
    Law("stretch", "uniform", 0.0015, 0.0015, "relative", "pulled in by the tensioner for good"),
    Law("guide_zero", "normal", 0.0, 0.08, "mm", "the operator sets the guide to its start by eye"),
    Law("warmth", "normal", 0.0, 1.0, "sd of coil over air", "friction at cruise, never below 0"),
    Law("warmth_time", "uniform", 180.0, 90.0, "s", "time constant of warming and of cooling at rest"),
    Law("shelf", "normal", 0.0, 0.25, "K", "the spool comes from a colder or warmer shelf"),
    Law("contact_length", "normal", 0.0, 0.03, "relative", "wire between coil and contact"),
)

BENCH_LAWS = (
    Law("room", "uniform", 22.0, 3.5, "degrees C", "air at the coil when the machine is switched on"),
    Law("room_slope", "normal", 0.0, 0.5, "K/h", "morning, sun, heating"),
    Law("room_walk", "uniform", 0.2, 0.15, "K/sqrt(h)", "doors and draughts"),
    Law("gain", "normal", 0.0, 1.0, "sd of the gain", "the meter"),
    Law("offset", "normal", 0.0, 1.0, "sd of the leads", "leads and slip ring"),
    Law("reading_noise", "uniform", 0.8, 0.3, "sd of a reading", "slow wander of contact and slip ring"),
    Law("sample_noise", "uniform", 2.5, 1.0, "sd of a reading", "white, of one sample; averaged away"),
    Law("thermometer", "normal", 0.0, 1.0, "sd of the thermometer", "its bias"),
    Law("bounces", "uniform", 0.16, 0.08, "1/s", "while turning; spoils about 2 % of the readings"),
    Law("mains", "uniform", 0.0, 0.02, "Hz", "off 50 Hz, or off 60 Hz for every fourth machine"),
    Law("hum_field", "uniform", 0.30, 0.25, "uT", "mains field in the shop"),
    Law("tilt", "uniform", 0.8, 0.6, "degrees", "turning axis off the coil's own: a small generator"),
    Law("tension", "normal", 0.0, 0.02, "relative", "felt brake off its set value"),
    Law("tension_pulse", "uniform", 0.15, 0.10, "relative", "twice a turn at 1000 rpm"),
    Law("tension_noise", "uniform", 0.02, 0.01, "relative", "of one sample"),
    Law("index_place", "uniform", 0.5, 0.5, "turn", "where the index mark sits"),
)


@dataclass(frozen=True, slots=True)
class Fate:
    """One drawn world, in plain units. `true_to(spec)` is the one in which nothing deviates."""

    ohm_per_m: float
    overall_mm: float
    slope_per_km: float
    walk_per_root_km: float
    perimeter_mm: float
    packing: float
    loosening: float
    bulge: float
    slide: float
    stretch: float
    guide_zero_mm: float
    room_c: float
    room_slope_k_per_h: float
    room_walk_k_per_root_h: float
    warmth_k: float
    warmth_time_s: float
    shelf_k: float
    gain: float
    offset_ohm: float
    contact_length_mm: float
    reading_noise: float
    sample_noise: float
    thermometer_k: float
    bounces_per_s: float
    mains_hz: float
    hum_field_ut: float
    tilt_degrees: float
    tension_cn: float
    tension_pulse: float
    tension_noise: float
    index_place: float


LOOSEST, DENSEST = 0.25, 0.88


def draw_fate(spec: PlantSpec, seed: int, *, coil: int = 0, spool_seed: int | None = None) -> Fate:
    """What `seed` makes of `spec` for its `coil`-th bobbin; the wire follows `spool_seed` where given."""
    wire_seed = seed if spool_seed is None else spool_seed
    drawn = {law.name: law.draw(wire_seed, "spool") for law in SPOOL_LAWS}
    drawn |= {law.name: law.draw(seed, f"coil {coil}") for law in COIL_LAWS}
    drawn |= {law.name: law.draw(seed, "bench") for law in BENCH_LAWS}
    return Fate(
        ohm_per_m=spec.ohm_per_m + drawn["ohm_per_m"] * spec.ohm_per_m_sd,
        overall_mm=spec.overall_mm + drawn["overall"] * spec.overall_sd_mm,
        slope_per_km=drawn["slope"],
        walk_per_root_km=drawn["walk"],
        perimeter_mm=spec.perimeter_mm * (1.0 + drawn["perimeter"] * spec.perimeter_sd_rel),
        packing=min(max(spec.packing + drawn["packing"] * spec.packing_sd, LOOSEST), DENSEST),
        loosening=drawn["loosening"],
        bulge=drawn["bulge"],
        slide=drawn["slide"],
        stretch=drawn["stretch"],
        guide_zero_mm=drawn["guide_zero"],
        room_c=drawn["room"],
        room_slope_k_per_h=drawn["room_slope"],
        room_walk_k_per_root_h=drawn["room_walk"],
        warmth_k=max(0.0, spec.coil_over_air_k + drawn["warmth"] * spec.coil_over_air_sd_k),
        warmth_time_s=drawn["warmth_time"],
        shelf_k=drawn["shelf"],
        gain=1.0 + drawn["gain"] * spec.gain_sd_pct / 100.0,
        offset_ohm=max(0.0, spec.lead_ohm + drawn["offset"] * spec.lead_sd_ohm),
        contact_length_mm=spec.contact_length_mm * (1.0 + drawn["contact_length"]),
        reading_noise=drawn["reading_noise"],
        sample_noise=drawn["sample_noise"],
        thermometer_k=drawn["thermometer"] * spec.celsius_sd,
        bounces_per_s=drawn["bounces"],
        mains_hz=drawn["mains"] + (60.0 if Draws(seed, "country").unit() < 0.25 else 50.0),
        hum_field_ut=drawn["hum_field"],
        tilt_degrees=drawn["tilt"],
        tension_cn=spec.tension_cn * (1.0 + drawn["tension"]),
        tension_pulse=drawn["tension_pulse"],
        tension_noise=drawn["tension_noise"],
        index_place=drawn["index_place"],
    )


def true_to(spec: PlantSpec) -> Fate:
    """The world in which everything is what it says: no error, no noise, no warmth, 20 degrees C."""
    return Fate(
        ohm_per_m=spec.ohm_per_m,
        overall_mm=spec.overall_mm,
        slope_per_km=0.0,
        walk_per_root_km=0.0,
        perimeter_mm=spec.perimeter_mm,
        packing=spec.packing,
        loosening=0.0,
        bulge=0.0,
        slide=1e9,
        stretch=0.0,
        guide_zero_mm=0.0,
        room_c=20.0,
        room_slope_k_per_h=0.0,
        room_walk_k_per_root_h=0.0,
        warmth_k=0.0,
        warmth_time_s=180.0,
        shelf_k=0.0,
        gain=1.0,
        offset_ohm=spec.lead_ohm,
        contact_length_mm=spec.contact_length_mm,
        reading_noise=0.0,
        sample_noise=0.0,
        thermometer_k=0.0,
        bounces_per_s=0.0,
        mains_hz=50.0,
        hum_field_ut=0.0,
        tilt_degrees=0.0,
        tension_cn=spec.tension_cn,
        tension_pulse=0.0,
        tension_noise=0.0,
        index_place=0.0,
    )
