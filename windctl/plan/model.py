"""What a coil will be: the plan, as data."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Literal

from windctl.lay.limits import Checked
from windctl.lay.program import Program
from windctl.plan.experience.basis import Basis
from windctl.plan.experience.supply import Left
from windctl.plan.pace import PaceSpec
from windctl.plan.prior import Prior

Fits = Literal["yes", "tight", "no"]
TargetKind = Literal["turns", "dcr_20c_ohm"]


@dataclass(frozen=True, slots=True)
class Learnt:
    """From how many coils the plan knows: of its spool ("" where none is named), and of its lay. `left`: the
    wire on the spool, None where it is not known."""

    spool: str
    spool_coils: int
    lay_coils: int
    left: Left | None


@dataclass(frozen=True, slots=True)
class Plan:
    """Predictions for one recipe on one machine. Resistances at 20 degrees C; sd: standard deviation."""

    recipe_name: str
    recipe_digest: str
    target_kind: TargetKind
    target_value: float
    turns: int
    turns_sd: float  # of the turns that meet a resistance target; 0 where turns are the target
    dcr_20c_ohm: float  # at `turns`
    dcr_sd_ohm: float
    ohm_per_m: float
    wire_length_m: float
    wire_mass_g: float  # copper and enamel
    perimeter_mm: float  # round the bare core
    mean_turn_mm: float
    overall_mm: float  # wire with enamel
    packing: float
    packing_sd: float
    build_mm: float  # mean over the gap
    build_sd_mm: float
    peak_build_mm: float  # the highest place along the gap
    side_build_mm: float  # that, bulging on the long sides: what must stay below the flange's edge
    side_build_sd_mm: float
    crown: float  # h * integral of the squared lay density: 1 is flat
    unevenness: float  # relative standard deviation of the build along the gap
    build_profile_mm: tuple[float, ...]  # from the start flange to the other, in equal parts of the gap
    fits: Fits
    duration_s: float
    wire_speed_mean_m_s: float  # at cruise, on the bare core
    wire_speed_peak_m_s: float
    wire_speed_peak_full_m_s: float  # at cruise, on the finished coil's outline
    checked: Checked  # what the program asks of the machine
    warnings: tuple[str, ...]
    prior: Prior
    basis: Basis  # what the finished coil is compared with, to learn from it
    learnt: Learnt
    pace: PaceSpec
    program: Program

    def as_json(self) -> dict[str, Any]:
        """The plan as other programs read it, format 1."""
        return {
            "format": 1,
            "recipe": {"name": self.recipe_name, "digest": self.recipe_digest},
            "target": {"kind": self.target_kind, "value": self.target_value},
            "turns": self.turns,
            "turns_sd": self.turns_sd,
            "dcr_20c_ohm": self.dcr_20c_ohm,
            "dcr_sd_ohm": self.dcr_sd_ohm,
            "ohm_per_m": self.ohm_per_m,
            "wire_length_m": self.wire_length_m,
            "wire_mass_g": self.wire_mass_g,
            "perimeter_mm": self.perimeter_mm,
            "mean_turn_mm": self.mean_turn_mm,
            "overall_mm": self.overall_mm,
            "packing": self.packing,
            "packing_sd": self.packing_sd,
            "build_mm": self.build_mm,
            "build_sd_mm": self.build_sd_mm,
            "peak_build_mm": self.peak_build_mm,
            "side_build_mm": self.side_build_mm,
            "side_build_sd_mm": self.side_build_sd_mm,
            "crown": self.crown,
            "unevenness": self.unevenness,
            "build_profile_mm": list(self.build_profile_mm),
            "fits": self.fits,
            "duration_s": self.duration_s,
            "wire_speed_mean_m_s": self.wire_speed_mean_m_s,
            "wire_speed_peak_m_s": self.wire_speed_peak_m_s,
            "wire_speed_peak_full_m_s": self.wire_speed_peak_full_m_s,
            "program": {
                "segments": self.program.segments,
                "digest": self.program.digest,
                "turns": self.program.turns,
            },
            "guide_mm_per_s": self.checked.guide_mm_per_s,
            "spool": self.learnt.spool or None,
            "learnt_from": {"spool_coils": self.learnt.spool_coils, "lay_coils": self.learnt.lay_coils},
            "warnings": list(self.warnings),
        }
