"""The coil on the bobbin, turn by turn: where each turn lands, how long it is, what it adds in resistance.

The gap between the flanges is cut into narrow bins with a build of their own. A turn comes from the spool
at the guide, follows it with the lag of the free wire, slides down where the build is too steep, and raises
the bins under it by its area over packing and bin width. Round any convex core a turn lies on the outline
grown by the build b, P0 + 2 pi b (Steiner); the long sides bow outwards, two shallow arcs of height h over
the straight s: 16 h^2 / (3 s). Crown, ribbons and edge effects come out of this and are nowhere put in.
"""

from __future__ import annotations

import math
from collections import deque
from dataclasses import dataclass

from windctl.machine.plant.draws import Draws
from windctl.machine.plant.fate import Fate
from windctl.machine.plant.spec import PlantSpec

_BIN_MM = 0.05
_SLIDE_BINS = 6  # a slope is judged over 0.3 mm, some wires wide
_TWO_PI = 2.0 * math.pi
_REMEMBERED = 20_000  # turns that can be taken off again


@dataclass(slots=True)
class Spool:
    """Where on the spool the wire comes from: metres used, and the random walk of its ohm per metre."""

    metres: float = 0.0
    walk: float = 0.0


def walked(fate: Fate, spool_seed: int, metres: float) -> float:
    """Where the random walk of a spool stands after so many metres that nobody watched."""
    if metres <= 0.0:
        return 0.0
    spread = fate.walk_per_root_km * math.sqrt(metres / 1000.0)
    return Draws(spool_seed, f"walk to {metres:.0f} m").normal(0.0, spread)


@dataclass(frozen=True, slots=True)
class _Turn:
    ohm: float
    length_mm: float
    bin: int
    rise_mm: float


class Coil:
    """One bobbin. `ohm` of its whole turns, `next_ohm` of the turn being laid, both at 20 degrees C."""

    __slots__ = (
        "_area",
        "_bin_mm",
        "_builds",
        "_fate",
        "_lag",
        "_laid",
        "_next",
        "_spec",
        "_spool",
        "_walk_draws",
        "_walk_sd",
        "_wire_mm",
        "ohm",
        "turns",
    )

    def __init__(self, spec: PlantSpec, fate: Fate, spool_seed: int, spool: Spool, guide_mm: float) -> None:
        self._spec = spec
        self._fate = fate
        self._spool = spool
        bins = max(4, round(spec.gap_mm / _BIN_MM))
        self._bin_mm = spec.gap_mm / bins
        self._builds = [0.0] * bins
        self._area = math.pi / 4.0 * fate.overall_mm**2
        self._lag = fate.perimeter_mm / (fate.perimeter_mm + spec.distance_mm)
        self._wire_mm = guide_mm
        self._walk_draws = Draws(spool_seed, f"walk from {spool.metres:.3f} m")
        self._walk_sd = fate.walk_per_root_km * math.sqrt(fate.perimeter_mm * 1e-6)
        self._laid: deque[_Turn] = deque(maxlen=_REMEMBERED)
        self.turns = 0
        self.ohm = 0.0
        self._next = self._turn_at(guide_mm)

    @property
    def next_ohm(self) -> float:
        """Resistance at 20 degrees C of the turn now being laid, once it is whole."""
        return self._next.ohm

    @property
    def ohm_per_m(self) -> float:
        """Of the wire now coming from the spool, at 20 degrees C."""
        along = self._fate.slope_per_km * self._spool.metres / 1000.0
        return self._fate.ohm_per_m * (1.0 + along + self._spool.walk)

    @property
    def build_mm(self) -> list[float]:
        """Build over the core in each bin, from the start flange."""
        return list(self._builds)

    @property
    def side_build_mm(self) -> float:
        """Greatest build on the bowed long sides."""
        return max(self._builds) * (1.0 + self._fate.bulge)

    def end_turn(self, guide_mm: float) -> None:
        """The turn being laid is whole; the next begins where the guide now stands."""
        turn = self._next
        self._raise(turn.bin, turn.rise_mm)
        self._laid.append(turn)
        self.turns += 1
        self.ohm += turn.ohm
        spool = self._spool
        spool.metres += turn.length_mm / (1000.0 * (1.0 + self._fate.stretch))
        if self._walk_sd:
            spool.walk += self._walk_draws.normal(0.0, self._walk_sd)
        self._next = self._turn_at(guide_mm)

    def take_off(self) -> bool:
        """Unwinds the last whole turn, which becomes the turn being laid. False: none is left to unwind."""
        if not self._laid:
            return False
        turn = self._laid.pop()
        self._raise(turn.bin, -turn.rise_mm)
        self.turns -= 1
        self.ohm = self.ohm - turn.ohm if self.turns else 0.0
        self._spool.metres -= turn.length_mm / (1000.0 * (1.0 + self._fate.stretch))
        self._next = turn
        return True

    def _turn_at(self, guide_mm: float) -> _Turn:
        fate, builds = self._fate, self._builds
        self._wire_mm += (guide_mm - self._wire_mm) * self._lag
        at = self._landing(min(max(int(self._wire_mm / self._bin_mm), 0), len(builds) - 1))
        progress = min(self.turns / self._spec.turns, 1.5)
        packing = fate.packing * (1.0 + fate.loosening * (0.5 - progress))
        rise = self._area / (packing * self._bin_mm)
        low, high = max(at - 1, 0), min(at + 1, len(builds) - 1)
        # a turn lies half way up what it adds to the bins under it
        under = 0.25 * builds[low] + 0.5 * builds[at] + 0.25 * builds[high]
        own = 0.375 if low < at < high else 0.625
        build = under + 0.5 * own * rise
        bow = fate.bulge * build
        length = fate.perimeter_mm + _TWO_PI * build
        if self._spec.straight_mm > 0.0:
            length += 16.0 * bow * bow / (3.0 * self._spec.straight_mm)
        ohm = length * 0.001 * self.ohm_per_m * (1.0 + fate.stretch)
        return _Turn(ohm, length, at, rise)

    def _landing(self, at: int) -> int:
        """The bin in which a turn that comes down at `at` stays: it slides where the build is too steep."""
        builds = self._builds
        last = len(builds) - 1
        steep = self._fate.slide * _SLIDE_BINS * self._bin_mm
        while True:
            left, right = max(at - _SLIDE_BINS, 0), min(at + _SLIDE_BINS, last)
            lower = left if builds[left] < builds[right] else right
            if builds[at] - builds[lower] <= steep:
                return at
            at = lower

    def _raise(self, at: int, rise_mm: float) -> None:
        builds = self._builds
        builds[at] += 0.5 * rise_mm
        builds[max(at - 1, 0)] += 0.25 * rise_mm
        builds[min(at + 1, len(builds) - 1)] += 0.25 * rise_mm
