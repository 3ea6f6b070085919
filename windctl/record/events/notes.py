"""What somebody wrote down."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar


@dataclass(frozen=True, slots=True)
class NoteMade:
    """Somebody wrote something down."""

    kind: ClassVar[str] = "note_made"
    at_ms: int
    text: str
    by: str
