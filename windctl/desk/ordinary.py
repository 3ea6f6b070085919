"""What is on the bench where nobody says: a single coil of common size, invented."""

from __future__ import annotations

ORDINARY = """\
format = 1
name = "ordinary single coil"
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
seed = 1
[spindle]
start_rpm = 150
start_turns = 20
cruise_rpm = 1000
finish_rpm = 120
finish_turns = 40
ramp_rpm_per_s = 60
[stop]
turns = 8000
tolerance_pct = 1
"""
