"""What the kit must be told of a machine, because no message tells it."""

from __future__ import annotations

from dataclasses import dataclass

from windctl.profile.model import MachineProfile


@dataclass(frozen=True)
class Machine:
    """Figures in counts, steps, steps/s and steps/s2; `late_s`: what the way to the board and back may take;
    `dither`: counts by which a standing spindle may show itself beside its place."""

    counts_per_turn: int = 400
    steps_per_turn: int = 400
    accel: int = 2000
    decel: int = 3333
    pace: int = 1000
    guide_span: int = 400
    late_s: float = 0.01
    dither: int = 0


def machine_of(profile: MachineProfile, rpm: float, guide_mm: float, *, simulated: bool) -> Machine:
    """The machine of a profile, to be turned at `rpm` and its guide moved `guide_mm` either way."""
    spindle = profile.spindle
    steps = spindle.steps_per_turn
    return Machine(
        counts_per_turn=spindle.counts_per_turn,
        steps_per_turn=steps,
        accel=max(100, round(spindle.accel_rpm_per_s * steps / 60)),
        decel=max(100, round(spindle.decel_rpm_per_s * steps / 60)),
        pace=max(20, round(min(rpm, spindle.max_rpm) * steps / 60)),
        guide_span=max(20, round(guide_mm * profile.guide.steps_per_mm)),
        late_s=0.01 if simulated else 0.05,
        dither=0 if simulated else 1,
    )
