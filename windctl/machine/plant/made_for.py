"""The bench on which a recipe is wound, for a virtual machine of a given profile."""

from __future__ import annotations

from windctl.coil.buildup import BuildUp, build_per_turn_mm
from windctl.coil.geometry import core_of
from windctl.machine.plant.spec import PlantSpec, scale_for
from windctl.profile.model import MachineProfile
from windctl.recipe.model import Recipe

# How densely a lay packs where nobody has measured it: fraction of the window, sd.
# Common practice, no source.
_PACKING = {"scatter": (0.63, 0.06), "even": (0.74, 0.05)}
_PERIMETER_SD_REL = 0.003  # of a moulded core; a third of it where somebody wrapped and measured
_HEAD_ROOM = 1.25  # of the contact's scale over the resistance that the recipe's wire and turns come to
_STRESS_N_PER_MM2 = 40.0  # pull where the recipe names none: a fifth of soft copper's strength


def plant_for(recipe: Recipe, profile: MachineProfile) -> PlantSpec:
    """What the recipe's bobbin, wire and lay and the profile's fittings and instruments come to."""
    core = core_of(recipe.bobbin)
    wire = recipe.wire_data()
    packing, packing_sd = _PACKING[recipe.lay.style]
    if recipe.lay.packing is not None:
        packing = recipe.lay.packing
        packing_sd = recipe.lay.packing_sd if recipe.lay.packing_sd is not None else packing_sd
    gap = recipe.bobbin.flange_gap_mm
    growth = BuildUp(core.perimeter_mm, build_per_turn_mm(wire.overall_mm, packing, gap))
    turns = float(recipe.program_turns)
    most_ohm = growth.wire_length_m(turns) * wire.ohm_per_m
    if recipe.stop.dcr_20c_ohm is not None:
        turns = growth.turns_for_length(recipe.stop.dcr_20c_ohm / wire.ohm_per_m)
    measured = recipe.bobbin.core_perimeter_mm is not None
    set_cn = recipe.tension.set_cn if recipe.tension is not None else None
    tension_cn = set_cn if set_cn is not None else wire.copper_area_mm2 * _STRESS_N_PER_MM2 * 100.0
    spindle, guide, readings = profile.spindle, profile.guide, profile.readings
    return PlantSpec(
        perimeter_mm=core.perimeter_mm,
        perimeter_sd_rel=_PERIMETER_SD_REL / 3.0 if measured else _PERIMETER_SD_REL,
        straight_mm=core.straight_mm,
        core_area_mm2=core.area_mm2,
        gap_mm=gap,
        ohm_per_m=wire.ohm_per_m,
        ohm_per_m_sd=wire.ohm_per_m_sd,
        overall_mm=wire.overall_mm,
        overall_sd_mm=wire.overall_sd_mm,
        packing=packing,
        packing_sd=packing_sd,
        margin_mm=recipe.lay.margin_mm,
        turns=turns,
        turns_per_pass=recipe.stroke_mm / recipe.pitch_mm,
        drive=spindle.drive == "step",
        counts_per_turn=spindle.counts_per_turn,
        steps_per_turn=spindle.steps_per_turn,
        index=spindle.index,
        cruise_rpm=min(recipe.spindle.cruise_rpm, spindle.max_rpm),
        guide=guide.kind == "step",
        steps_per_mm=guide.steps_per_mm,
        backlash_mm=guide.backlash_mm,
        travel_mm=guide.travel_mm,
        distance_mm=guide.distance_mm,
        tension_sensor=profile.tension.sensor,
        tension_cn=tension_cn,
        tension_unit=profile.tension.unit,
        readings=readings.mode,
        milliohm_per_unit=scale_for(most_ohm * _HEAD_ROOM),
        lead_ohm=readings.lead_ohm,
        lead_sd_ohm=readings.lead_sd_ohm,
        gain_sd_pct=readings.gain_sd_pct,
        noise_pct=readings.noise_pct,
        floor_ohm=readings.floor_ohm,
        celsius_sd=readings.celsius_sd,
        coil_over_air_k=readings.coil_over_air_k,
        coil_over_air_sd_k=readings.coil_over_air_sd_k,
        contact_length_mm=readings.contact_length_mm,
    )
