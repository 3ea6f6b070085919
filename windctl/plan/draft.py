"""A recipe written from a few answers: what was asked, and sensible values with a comment for all the rest.

The text is a recipe file like any other; nothing remembers that it was drafted.
"""

from __future__ import annotations

import json
import math
from dataclasses import dataclass
from typing import Literal

from windctl.coil.buildup import BuildUp, build_per_turn_mm
from windctl.coil.geometry import core_of
from windctl.coil.wire_speed import wire_speed
from windctl.material.enamel import Grade
from windctl.material.wire import Wire, resolve
from windctl.plan.beliefs import PACKING
from windctl.plan.cautions import BREAKS_N_PER_MM2, fastest_m_s
from windctl.profile.model import Guide
from windctl.recipe.tables import Bobbin

_PITCH_IN_WIRES = {"scatter": 3.0, "even": 1.1}
_MARGIN_MM = {"scatter": 0.3, "even": 0.05}
_PULL = 0.17  # of what breaks the wire
_CRUISES_RPM = (1000, 900, 800, 700, 600, 500, 400, 300, 200, 100)
_SPOOLS = 0.1  # relative, either way of the turns foreseen: what a spool and a lay may do


@dataclass(frozen=True, slots=True)
class Answers:
    """What only the winder knows. Lengths in mm; `size` is "AWG 42" or a bare diameter in mm; without
    `overall_mm` the enamel is `grade`; the target is in turns or in ohm at 20 degrees C.

    `corner_radius_mm` None: half the width. `packing`, `ohm_per_m` (at 20 degrees C): with their
    standard deviations, where they are known.
    `turns`: the least and the most for a resistance target, else a tenth about those foreseen.
    """

    name: str
    core_length_mm: float
    core_width_mm: float
    flange_gap_mm: float
    flange_depth_mm: float
    direction_from_face: Literal["cw", "ccw"]
    size: str
    overall_mm: float | None
    style: Literal["scatter", "even"]
    target: Literal["turns", "dcr_20c_ohm"]
    amount: float
    grade: Grade = "grade 1"
    corner_radius_mm: float | None = None
    core_perimeter_mm: float | None = None
    packing: tuple[float, float] | None = None
    ohm_per_m: tuple[float, float] | None = None
    turns: tuple[int, int] | None = None
    heading: str = "A first draft: every value is yours to change. `windctl plan` says what the coil will be."


def draft(answers: Answers) -> str:
    """The recipe's text. Raises ValueError where a wire or a bobbin like that does not exist."""
    wire = _wire(answers)
    bobbin = Bobbin(
        core_length_mm=answers.core_length_mm,
        core_width_mm=answers.core_width_mm,
        corner_radius_mm=(
            answers.core_width_mm / 2 if answers.corner_radius_mm is None else answers.corner_radius_mm
        ),
        core_perimeter_mm=answers.core_perimeter_mm,
        flange_gap_mm=answers.flange_gap_mm,
        flange_depth_mm=answers.flange_depth_mm,
    )
    blocks = [
        "\n".join(f"# {line}" for line in answers.heading.splitlines()),
        _block(
            [
                ("format = 1", "version of this form"),
                (
                    f"name = {json.dumps(answers.name, ensure_ascii=False)}",
                    "on screens, labels and in the book",
                ),
            ]
        ),
        _block(
            [
                ("[bobbin]", ""),
                (
                    f"core_length_mm = {bobbin.core_length_mm:.10g}",
                    "outside of what the wire lies on, the long way",
                ),
                (f"core_width_mm = {bobbin.core_width_mm:.10g}", "and the short way"),
                (f"corner_radius_mm = {bobbin.corner_radius_mm:.10g}", "half the width is a racetrack"),
                _perimeter_line(bobbin),
                (f"flange_gap_mm = {bobbin.flange_gap_mm:.10g}", "free height between the flanges"),
                (
                    f"flange_depth_mm = {bobbin.flange_depth_mm:.10g}",
                    "from the core's surface to the flange's edge",
                ),
            ]
        ),
        _block(
            [
                ("[coil]", ""),
                (
                    f'direction_from_face = "{answers.direction_from_face}"',
                    "the wire's way round, start to finish, seen from the side that faces the strings",
                ),
                ('mounted = "face out"', "that side looks at the operator; face in: at the motor"),
                ('start_flange = "base"', "the lay starts at the flange away from the strings; or face"),
                ('# magnet_up = "south"', "polarity towards the strings: north or south"),
            ]
        ),
        _block([("[wire]", ""), *_wire_lines(answers)]),
        _block([("[lay]", ""), *_lay_lines(answers, wire)]),
        _block([("[spindle]", ""), *_spindle_lines(answers, wire, bobbin)]),
        _block(
            [
                ("[tension]", ""),
                (
                    f"set_cn = {_pull_cn(wire):g}",
                    "about a sixth of what breaks this wire; 1 cN is about the weight of 1 gram",
                ),
                (
                    f"band_cn = {_pull_cn(wire) / 2:g}",
                    "the mean of a turn may differ by this much, else it stops: a broken wire, a snag",
                ),
            ]
        ),
        _block([("[stop]", ""), *_stop_lines(answers, wire, bobbin)]),
    ]
    return "\n\n".join(blocks) + "\n"


def _block(lines: list[tuple[str, str]]) -> str:
    """Lines with their comments set one under the other."""
    width = max(len(line) for line, _ in lines)
    return "\n".join(f"{line:<{width}}  # {said}" if said else line for line, said in lines)


def _perimeter_line(bobbin: Bobbin) -> tuple[str, str]:
    if bobbin.core_perimeter_mm is None:
        return "# core_perimeter_mm =", "wrap 20 turns of the wire, divide by 20; beats the computed one"
    return f"core_perimeter_mm = {bobbin.core_perimeter_mm:.10g}", "measured; beats the computed one"


def _wire(answers: Answers) -> Wire:
    gauge, diameter_mm = _size(answers.size)
    enamel = answers.grade if answers.overall_mm is None else None
    return resolve(gauge=gauge, diameter_mm=diameter_mm, enamel=enamel, overall_mm=answers.overall_mm)


def _size(text: str) -> tuple[str | None, float | None]:
    """(gauge, None) or (None, bare diameter in mm)."""
    try:
        return None, float(text.replace(",", "."))
    except ValueError:
        return text, None


def _wire_lines(answers: Answers) -> list[tuple[str, str]]:
    gauge, diameter_mm = _size(answers.size)
    bare = f"gauge = {json.dumps(gauge)}" if gauge is not None else f"diameter_mm = {diameter_mm:.10g}"
    lines = [(bare, "bare conductor")]
    if answers.overall_mm is None:
        grade = f'enamel = "{answers.grade}"'
        lines.append((grade, "or overall_mm from a micrometer, which is more certain"))
    else:
        lines.append((f"overall_mm = {answers.overall_mm:.10g}", "over the enamel, by micrometer"))
    return [
        *lines,
        ('# insulation = "polyurethane"', "the enamel's kind decides how an end is bared"),
        *_ohm_per_m_lines(answers),
    ]


def _ohm_per_m_lines(answers: Answers) -> list[tuple[str, str]]:
    if answers.ohm_per_m is None:
        return [("# ohm_per_m_20c =", "measured on this spool at 20 degrees C, if you did")]
    ohm, sd = answers.ohm_per_m
    return [
        (f"ohm_per_m_20c = {ohm:.4g}", "at 20 degrees C"),
        (f"ohm_per_m_sd = {sd:.2g}", "and how surely, as a standard deviation"),
    ]


def _lay_lines(answers: Answers, wire: Wire) -> list[tuple[str, str]]:
    even = answers.style == "even"
    margin = min(_MARGIN_MM[answers.style], answers.flange_gap_mm / 10)
    lines = [
        (f'style = "{answers.style}"', "scatter: loose, like a hand's. even: turn beside turn"),
        (
            f"pitch_mm = {_pitch_mm(answers, wire):g}",
            "guide travel per turn" + ("" if even else ", the mean"),
        ),
        (f"margin_mm = {margin:g}", "the guide turns round this far inside each flange"),
    ]
    if answers.packing is not None:
        packing, sd = answers.packing
        lines.append((f"packing = {packing:.3f}", "share of the window filled with wire"))
        lines.append((f"packing_sd = {max(sd, 0.001):.3f}", "and how surely, as a standard deviation"))
    if even:
        return lines
    return [
        *lines,
        ('pattern = "wander"', "or stagger, or ripple"),
        ("amount = 0.4", "0 is regular, 1 the wildest"),
        ("seed = 1", "the same seed, the same scatter, on every machine and for ever"),
        (f"reversal_spread_mm = {margin / 2:g}", "the turn-round points differ by this much"),
    ]


def _pitch_mm(answers: Answers, wire: Wire) -> float:
    pitch = _PITCH_IN_WIRES[answers.style] * wire.overall_mm
    if answers.style == "even":
        return math.ceil(pitch * 1000) / 1000
    return round(min(pitch, answers.flange_gap_mm / 4), 3)


def _spindle_lines(answers: Answers, wire: Wire, bobbin: Bobbin) -> list[tuple[str, str]]:
    full = core_of(bobbin).grown(bobbin.flange_depth_mm)
    jump = Guide().start_stop_mm_per_s / 2  # a scatter's quickest turn-round, at twice the mean pitch
    cruise = next(
        (
            rpm
            for rpm in _CRUISES_RPM
            if wire_speed(full, rpm).peak_m_s <= fastest_m_s(wire)
            and _pitch_mm(answers, wire) * rpm / 60 <= jump
        ),
        _CRUISES_RPM[-1],
    )
    slow = min(120, cruise)
    return [
        (f"start_rpm = {slow}", "slow while the first turns find their place"),
        ("start_turns = 20", "for this many turns"),
        (f"cruise_rpm = {cruise}", "the bulk; a long bobbin jerks the wire twice a turn"),
        (f"finish_rpm = {slow}", "slow enough to stop within a turn or so"),
        ("finish_turns = 30", "for this many turns"),
        ("ramp_rpm_per_s = 60", "how fast the speed changes between them"),
    ]


def _pull_cn(wire: Wire) -> float:
    pull = _PULL * BREAKS_N_PER_MM2 * wire.copper_area_mm2 * 100
    return max(round(pull), 1) if pull >= 1 else round(pull, 2)


def _stop_lines(answers: Answers, wire: Wire, bobbin: Bobbin) -> list[tuple[str, str]]:
    if answers.target == "turns":
        tolerance = "of the turns; what counts as a good coil"
        return [(f"turns = {answers.amount:.0f}", "target"), ("tolerance_pct = 0.1", tolerance)]
    per_turn = build_per_turn_mm(wire.overall_mm, PACKING[answers.style][0], bobbin.flange_gap_mm)
    turns = BuildUp(core_of(bobbin).perimeter_mm, per_turn).turns_for_length(answers.amount / wire.ohm_per_m)
    unit = 10 if turns > 200 else 1
    least, most = answers.turns or (
        math.floor(turns * (1 - _SPOOLS) / unit) * unit,
        math.ceil(turns * (1 + _SPOOLS) / unit) * unit,
    )
    return [
        (f"dcr_20c_ohm = {answers.amount:.10g}", "target, at 20 degrees C"),
        ("tolerance_pct = 2", "of the resistance; what counts as a good coil"),
        (f"min_turns = {max(least, 1)}", "never fewer: a reading that says so is wrong, or the wire is"),
        (f"max_turns = {most}", "never more: see that they fit"),
    ]
