"""What a run says to a request."""

from __future__ import annotations

from dataclasses import dataclass

from windctl.record.events import Event

OFF = "The drives go off: hands may go in when it says so."


@dataclass(frozen=True, slots=True)
class Answer:
    """`facts` to record, none where the request cannot be met; `says` is for whoever asked ("": nothing)."""

    facts: tuple[Event, ...] = ()
    says: str = ""
