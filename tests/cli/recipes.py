"""Small recipes for the tests of commands: a demo bobbin, few turns."""

from __future__ import annotations

from pathlib import Path

SMALL = """\
format = 1
name = "demo small coil"
[bobbin]
core_length_mm = 56.0
core_width_mm = 6.0
corner_radius_mm = 3.0
flange_gap_mm = 11.0
flange_depth_mm = 8.5
[coil]
direction_from_face = "cw"
mounted = "face out"
start_flange = "base"
[wire]
gauge = "AWG 42"
enamel = "grade 1"
[lay]
style = "scatter"
pitch_mm = 0.22
margin_mm = 0.3
pattern = "wander"
amount = 0.4
seed = 1947
[spindle]
start_rpm = 300
start_turns = 3
cruise_rpm = 1000
finish_rpm = 300
finish_turns = 3
ramp_rpm_per_s = 300
[stop]
{stop}
"""

TO_TURNS = "turns = {turns}\ntolerance_pct = 1"
TO_RESISTANCE = "dcr_20c_ohm = {ohm}\ntolerance_pct = 2\nmin_turns = {least}\nmax_turns = {most}"


def to_turns(folder: Path, turns: int = 150) -> Path:
    """A recipe file that ends at a number of turns."""
    file = folder / "to_turns.toml"
    file.write_text(SMALL.format(stop=TO_TURNS.format(turns=turns)), encoding="utf-8")
    return file


def to_resistance(folder: Path, ohm: float = 200.0, least: int = 200, most: int = 400) -> Path:
    """A recipe file that ends at a resistance."""
    file = folder / "to_resistance.toml"
    stop = TO_RESISTANCE.format(ohm=ohm, least=least, most=most)
    file.write_text(SMALL.format(stop=stop), encoding="utf-8")
    return file
