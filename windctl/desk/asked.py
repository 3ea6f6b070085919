"""What one call of windctl was told, whichever face it came by."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path


@dataclass(frozen=True, slots=True)
class Shared:
    """The shared options of one call, wherever they stood. None or False: not given."""

    json: bool = False
    book: Path | None = None
    machine: str | None = None
    port: str | None = None
    speed: float | None = None
    plant_seed: int | None = None
    readings: str | None = None
    spool: str | None = None
    dry_run: bool = False
    at_turn: float | None = None
    batch: str | None = None
    of: int | None = None
    quiet: bool = False
    no_input: bool = False
