"""What a program builds: its wire deposited turn by turn along the gap.

The guide's path is sampled four times a turn; between two samples the wire spreads evenly over the way
between them. The wire trails the guide: laid at x from a guide at g, a free length L away, it runs in at
the slope (g - x) / L, so dx/ds = (g - x) / L over the wound length s. Its place is that of its middle,
never nearer to a flange than half its diameter, and a place along the gap builds up as much as wire lies
over it. That is the lay as guided; `Deposit.settled` lets it slide to the slope that loose turns stand at.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace
from itertools import accumulate

import numpy as np
from numpy.typing import NDArray

from windctl.lay.program import Program
from windctl.lay.settle import settle

F64 = NDArray[np.float64]

_PER_TURN = 4  # samples of the guide's path
_BINS_PER_WIRE = 4
_MOST_BINS = 4096
_HEAP_WIRES = 6  # the narrowest heap that stands, in wire diameters. Our judgement
# mm/mm. Turns stacked like pipes stand at 60 degrees, a loose heap at 35 or so; this is 50. Our judgement
STEEPEST = 1.2
_FORGOTTEN = 1e-6  # of a guide position, in the wire's place


@dataclass(frozen=True, slots=True)
class Deposit:
    """density: f64[bins], relative to an even lay over the whole gap (mean 1), from the start flange on."""

    density: F64
    heap_bins: int = 1  # how many bins are as wide as the narrowest heap that stands

    @property
    def crown(self) -> float:
        """h * integral(f^2) over the gap h, f the density with integral 1: how much a growing coil's
        turns gain in length against a flat one's. 1 is flat."""
        return crown_of(self.density)

    @property
    def peak(self) -> float:
        """The highest heap's build, relative to the mean: the highest mean over `heap_bins` bins. What is
        narrower slides off itself."""
        total = np.concatenate([np.zeros(1), np.cumsum(self.density)])
        wide = min(self.heap_bins, len(self.density))
        return float((total[wide:] - total[:-wide]).max() / wide)

    @property
    def unevenness(self) -> float:
        """Standard deviation of the build along the gap, relative to the mean."""
        return float(self.density.std())

    def settled(self, build_mm: float, gap_mm: float, steepest: float = STEEPEST) -> Deposit:
        """This lay at a mean build of `build_mm` if it is loose and nothing holds its edges: slid until no
        slope is steeper than `steepest` (mm/mm). The length of wire goes with the profile as it ends up,
        whenever the turns slid."""
        if build_mm <= 0:
            return self
        step = steepest * gap_mm / len(self.density)
        return replace(self, density=settle(self.density * build_mm, step) / build_mm)

    def profile(self, parts: int) -> F64:
        """f64[parts]: the density over equal parts of the gap."""
        bins = len(self.density)
        total = np.concatenate([np.zeros(1), np.cumsum(self.density)])
        at = np.interp(np.linspace(0, bins, parts + 1), np.arange(bins + 1), total)
        parted: F64 = np.diff(at) * (parts / bins)
        return parted


def crown_of(density: F64) -> float:
    """The crown factor of a density sampled in equal parts of the gap."""
    return float((density**2).mean() / density.mean() ** 2)


def deposit(
    program: Program,
    *,
    gap_mm: float,
    datum_mm: float,
    overall_mm: float,
    lag_turns: float = 0.0,
    turns: float | None = None,
) -> Deposit:
    """Deposit the first `turns` turns of a program, or all of it.

    datum_mm: from the start flange to where the guide starts. lag_turns: free length over turn length.
    """
    path = trailing(guide_path_mm(program, datum_mm, turns), lag_turns * _PER_TURN)
    radius = min(overall_mm, gap_mm) / 2
    path = np.clip(path, radius, gap_mm - radius)
    bins = min(_MOST_BINS, math.ceil(_BINS_PER_WIRE * gap_mm / overall_mm))
    laid = _wire_up_to(path, gap_mm, bins)
    edges = np.linspace(0, gap_mm, bins + 1)
    middle = (edges[1:] + edges[:-1]) / 2
    over = np.interp(middle + radius, edges, laid) - np.interp(middle - radius, edges, laid)
    return Deposit(over / over.mean(), max(1, round(_HEAP_WIRES * overall_mm / gap_mm * bins)))


def guide_path_mm(program: Program, datum_mm: float, turns: float | None = None) -> F64:
    """f64[]: where the guide stands, mm from the start flange, four times a turn.

    The motor's positions less the drive's play, which the guide does not follow.
    """
    end = (
        program.total_counts if turns is None else min(turns * program.counts_per_turn, program.total_counts)
    )
    samples = max(1, round(_PER_TURN * end / program.counts_per_turn))
    at = np.linspace(0, end, samples + 1)
    motor = np.interp(at, program.count_marks, program.guide_marks)
    play = program.backlash_steps
    if play:
        # Outward the guide is where the motor is, inward it is `play` steps further out, between it stands.
        stands = accumulate(motor.tolist(), lambda guide, m: m if guide < m else min(guide, m + play))
        motor = np.fromiter(stands, dtype=np.float64, count=samples + 1)
    return datum_mm + motor / program.steps_per_mm


def trailing(path: F64, lag: float) -> F64:
    """The first-order lag of `path` by `lag` samples, exact for a path that is straight between samples."""
    if lag <= 0:
        return path
    keep = math.exp(-1 / lag)
    now = 1 - (1 - keep) * lag
    before = (1 - keep) * lag - keep
    taps = math.ceil(math.log(_FORGOTTEN) / math.log(keep)) + 1
    kernel = (before + keep * now) * keep ** np.arange(-1, taps, dtype=np.float64)
    kernel[0] = now
    kernel /= kernel.sum()
    led = np.concatenate([np.full(len(kernel) - 1, path[0]), path])
    return np.convolve(led, kernel, mode="valid")


def _wire_up_to(path: F64, gap_mm: float, bins: int) -> F64:
    """f64[bins + 1]: how much of the wire lies below each bin edge, exact at the edges.

    Each piece of the path is a box of density; its cumulative is a ramp that starts at one end and stops
    at the other. A ramp that starts within a bin equals, at every edge, two that start at the bin's
    edges and share its slope as the place shares the bin: so the slopes are collected at the edges and
    summed twice.
    """
    width = gap_mm / bins
    low = np.minimum(path[:-1], path[1:])
    high = np.maximum(path[:-1], path[1:])
    short = high - low < width / 16
    high = np.where(short, np.minimum(low + width / 16, gap_mm), high)
    low = np.where(short, high - width / 16, low)
    slope = 1 / (high - low)
    slopes = np.zeros(bins + 2)
    for ends, sign in ((low, 1.0), (high, -1.0)):
        place = ends / width
        edge = np.minimum(place.astype(np.int64), bins)
        share = place - edge
        slopes += sign * np.bincount(edge, (1 - share) * slope, minlength=bins + 2)
        slopes += sign * np.bincount(edge + 1, share * slope, minlength=bins + 2)
    density = np.cumsum(slopes)
    laid = np.zeros(bins + 1)
    np.cumsum(density[:bins] * width, out=laid[1:])
    return laid
