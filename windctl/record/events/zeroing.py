"""Leads and contact read by themselves before the first turn, in place of what the profile says of them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import ClassVar


@dataclass(frozen=True, slots=True)
class ZeroWanted:
    """Before the first turn the contact's leads are to be put together and read.

    `simulated_hand`: of a simulated machine, somebody there can do it.
    """

    kind: ClassVar[str] = "zero_wanted"
    at_ms: int
    by: str
    simulated_hand: bool = False


@dataclass(frozen=True, slots=True)
class LeadsTogether:
    """Somebody says that nothing is between the contact's leads: what is read from now on is them."""

    kind: ClassVar[str] = "leads_together"
    at_ms: int
    by: str


@dataclass(frozen=True, slots=True)
class ContactZeroed:
    """Leads and contact have `ohm`, from the mean of so many readings; taken off from now on."""

    kind: ClassVar[str] = "contact_zeroed"
    at_ms: int
    ohm: float
    sd_ohm: float
    readings: int
    by: str


@dataclass(frozen=True, slots=True)
class ZeroRefused:
    """What was read cannot be leads, or could not be read. `why`: "open", "too much", "unsteady", "silent".

    `ohm`: the last mean, 0 where there is none; `most_ohm`: what the profile allows.
    """

    kind: ClassVar[str] = "zero_refused"
    at_ms: int
    why: str
    ohm: float
    most_ohm: float


@dataclass(frozen=True, slots=True)
class ZeroEnded:
    """The contact is not zeroed after all; whatever was taken off before stays."""

    kind: ClassVar[str] = "zero_ended"
    at_ms: int
    by: str
    reason: str
