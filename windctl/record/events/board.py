"""What the board said, but for its readings; and that it cannot be heard any more."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar

from windctl.protocol.messages import Identity, Refused, Status


@dataclass(frozen=True, slots=True)
class BoardGreeted:
    """The board answered a greeting: what it is and where it stands."""

    kind: ClassVar[str] = "board_greeted"
    at_ms: int
    identity: Identity


@dataclass(frozen=True, slots=True)
class StatusHeard:
    """The board said where it stands."""

    kind: ClassVar[str] = "status_heard"
    at_ms: int
    status: Status


@dataclass(frozen=True, slots=True)
class CommandRefused:
    """The board declined a command; nothing changed."""

    kind: ClassVar[str] = "command_refused"
    at_ms: int
    refused: Refused


@dataclass(frozen=True, slots=True)
class LinkLost:
    """The line to the board went away."""

    kind: ClassVar[str] = "link_lost"
    at_ms: int
    reason: str
