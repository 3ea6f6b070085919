"""What a run hands back, as data: the JSON of `wind` and `resume`."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from windctl.forecast.waiting import Waiting
from windctl.record.summary import CoilSummary


@dataclass(frozen=True, slots=True)
class Outcome:
    """How one run of one coil ended. `left` is the runner's word for it; digests are hex.

    `record_digest` of an open coil covers what is durable so far. Digests are "" where the book could not
    be read.
    """

    number: str
    coil_id: str
    left: str  # "finished", "held", "unconfirmed", "turn wanted", "failed"
    why: str
    summary: CoilSummary
    trace_digest: str
    record_digest: str
    error: Exception | None
    waiting: Waiting | None = None  # what it would gain to read the coil once more when it has cooled

    def as_json(self) -> dict[str, Any]:
        """The outcome as other programs read it, format 1."""
        summary = self.summary
        return {
            "format": 1,
            "coil": self.number,
            "id": self.coil_id,
            "outcome": summary.outcome,
            "reason": summary.reason if summary.outcome != "open" else self.why,
            "turns": summary.turns,
            "dcr_20c_ohm": summary.dcr_20c_ohm,
            "dcr_u95_ohm": summary.dcr_u95_ohm,
            "target": {"kind": summary.target_kind, "value": summary.target_value},
            "batch": summary.batch or None,
            "verdict": summary.verdict,
            "program_digest": summary.program_digest,
            "trace_digest": self.trace_digest or None,
            "record_digest": self.record_digest or None,
            "read_again": None if self.waiting is None else self.waiting.as_json(),
        }
