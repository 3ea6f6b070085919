"""A coil's own course: what it stands on, where it is to stop, how it ended."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

from windctl.plan.experience.basis import Basis
from windctl.plan.pace import PaceSpec
from windctl.plan.prior import Prior
from windctl.protocol.messages import Setup


@dataclass(frozen=True, slots=True)
class Target:
    """What ends the coil. `kind` is "turns" or "dcr_20c_ohm"; `value` turns or ohm at 20 degrees C.

    `tolerance_pct` belongs to the quantity of the target. The turns are never outside `min_turns..max_turns`.
    """

    kind: str
    value: float
    tolerance_pct: float
    min_turns: int
    max_turns: int


@dataclass(frozen=True, slots=True)
class CoilStarted:
    """Everything that the coil stands on, so that no later version of anything is needed to go on with it."""

    kind: ClassVar[str] = "coil_started"
    coil_id: str
    number: str
    wall_time: str
    operator: str
    version: str
    recipe_name: str
    recipe_text: str
    recipe_digest: str
    profile_json: str
    machine: str  # the profile's name; of a simulated machine with its plant seed
    readings_mode: str  # "live", "checks", "none"
    program_digest: str
    program_id: int
    program_packed: str  # base64 of zlib of the segments in wire form
    total_counts: int
    setup: Setup
    pace: PaceSpec
    prior: Prior
    target: Target
    planned_turns: float
    spool: str
    batch: str
    of: int  # 0: not part of a counted batch
    basis: Basis | None = None  # what the coil is compared with when it teaches; None: an older version's
    spool_left_m: float | None = None  # wire on the spool as the coil was begun, as far as was known
    spool_left_sd_m: float | None = None
    guide_pace: int = 200  # motor steps/s at which the guide is brought back to a place, the spindle at rest
    counter: str = "board"  # "read": nobody counts for windctl, turns are read by eye and typed


@dataclass(frozen=True, slots=True)
class Resumed:
    """Another run took the coil up after an interruption."""

    kind: ClassVar[str] = "resumed"
    at_ms: int
    wall_time: str
    operator: str
    version: str


@dataclass(frozen=True, slots=True)
class StopPointChosen:
    """Where the spindle is to stop, in counts, and what was forecast for that place when it was chosen."""

    kind: ClassVar[str] = "stop_point_chosen"
    at_ms: int
    count: int
    reason: str
    finish_ohm: float
    finish_sd: float


@dataclass(frozen=True, slots=True)
class CoilFinished:
    """The end of the coil: always an outcome and a reason.

    `outcome`: "finished", "stopped" (by the operator), "tripped". `dcr_20c_ohm`, `dcr_u95_ohm` are 0 where
    nothing is known; u95 is the half-width of the 95 % interval. `verdict`: "within", "outside" or
    "not judged".
    """

    kind: ClassVar[str] = "coil_finished"
    at_ms: int
    outcome: str
    reason: str
    count: int
    turns: float
    dcr_20c_ohm: float
    dcr_u95_ohm: float
    verdict: str
