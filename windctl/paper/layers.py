"""How a coil grew between its flanges: the recorded program deposited up to the turns that were wound."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from windctl.coil.fit import bulge
from windctl.coil.geometry import Core, core_from
from windctl.paper.recorded import Bobbin, profile_of
from windctl.protocol.messages import Capability
from windctl.record.events import CoilStarted

_PARTS = 60  # of the gap
_LAYERS = 6


@dataclass(frozen=True, slots=True)
class Layer:
    """The winding's surface once `turn` turns lay on the bobbin. heights_mm: on a long side, in equal parts
    of the gap from the start flange on."""

    turn: float
    heights_mm: tuple[float, ...]


@dataclass(frozen=True, slots=True)
class Growth:
    """A coil's surfaces from the inside out. `by_hand`: nobody recorded where the wire was guided, and the
    lay is drawn even."""

    core: Core
    layers: tuple[Layer, ...]
    build_mm: float  # mean, round the core and along the gap
    by_hand: bool

    @property
    def highest_mm(self) -> float:
        """The highest place of the winding, on a long side."""
        return max(self.layers[-1].heights_mm)


def growth_of(started: CoilStarted, bobbin: Bobbin, turns: float) -> Growth | None:
    """How the coil of `turns` turns lies in its bobbin; None where the record does not say how it packs.

    Wire and packing are those that the plan went by, so the heights are as sure as a build is foreseen.
    Raises RecordBroken where the stored program cannot be read.
    """
    if started.basis is None or turns < 1:
        return None
    coil = started.basis.coil
    core = core_from(bobbin.core_length, bobbin.core_width, bobbin.corner_radius, bobbin.core_perimeter)
    more = 1.0 + bulge(core)[0]
    by_hand = not started.setup.fitted & Capability.GUIDE_STEP
    at = [turns * n / _LAYERS for n in range(1, _LAYERS + 1)]
    spread = [[1.0] * _PARTS for _ in at] if by_hand else _densities(started, bobbin, at)
    layers: list[Layer] = []
    below = [0.0] * _PARTS
    for turn, density in zip(at, spread, strict=True):
        build = coil.build_mm(turn) * more
        below = [max(old, build * part) for old, part in zip(below, density, strict=True)]
        layers.append(Layer(turn, tuple(below)))
    return Growth(core, tuple(layers), coil.build_mm(turns), by_hand)


def _densities(started: CoilStarted, bobbin: Bobbin, turns: Sequence[float]) -> list[list[float]]:
    """Along equal parts of the gap, relative to an even lay."""
    from windctl.lay.deposit import deposit
    from windctl.lay.program import Program
    from windctl.record.program import unpacked

    assert started.basis is not None
    coil = started.basis.coil
    guide = profile_of(started).get("guide", {})
    steps_per_mm = float(guide.get("steps_per_mm", 200.0))
    program = Program.from_packed(
        unpacked(started.program_packed),
        counts_per_turn=started.setup.counts_per_turn,
        steps_per_mm=steps_per_mm,
        backlash_steps=round(float(guide.get("backlash_mm", 0.0)) * steps_per_mm),
    )
    found = []
    for turn in turns:
        laid = deposit(
            program,
            gap_mm=bobbin.gap,
            datum_mm=bobbin.margin,
            overall_mm=started.basis.overall_mm,
            lag_turns=float(guide.get("distance_mm", 0.0)) / coil.mean_turn_mm(turn),
            turns=turn,
        )
        if bobbin.loose:
            laid = laid.settled(coil.build_mm(turn), bobbin.gap)
        found.append([float(part) for part in laid.profile(_PARTS)])
    return found


def outline(heights_mm: Sequence[float], gap_mm: float) -> list[tuple[float, float]]:
    """(place along the gap, height) of a surface: through the middle of each part, level to the flanges."""
    wide = gap_mm / len(heights_mm)
    middles = [((n + 0.5) * wide, height) for n, height in enumerate(heights_mm)]
    return [(0.0, heights_mm[0]), *middles, (gap_mm, heights_mm[-1])]


def shares(layers: Sequence[Layer]) -> list[tuple[float, float]]:
    """From which turn to which each layer was wound."""
    return list(pairwise([0.0, *(layer.turn for layer in layers)]))
