"""What happened to the wire."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar


@dataclass(frozen=True, slots=True)
class WireBroke:
    """The wire broke when `turn` turns lay on the bobbin; what was counted beyond is without wire."""

    kind: ClassVar[str] = "wire_broke"
    at_ms: int
    turn: float
    by: str


@dataclass(frozen=True, slots=True)
class Spliced:
    """The wire was joined at `turn`; the same spool goes on."""

    kind: ClassVar[str] = "spliced"
    at_ms: int
    turn: float
    by: str


@dataclass(frozen=True, slots=True)
class WireChanged:
    """Another spool of the recipe's wire was joined on at `turn`. `spool`: its name, where it has one."""

    kind: ClassVar[str] = "wire_changed"
    at_ms: int
    turn: float
    spool: str
    by: str
