"""How a coil went, in a line. Pure."""

from __future__ import annotations

from windctl.desk.numbers import ohm, short_digest, turns
from windctl.run.outcome import Outcome
from windctl.tui.looks import OUTCOMES, VERDICTS, Look


def outcome_words(outcome: Outcome, truth: str = "") -> tuple[Look, str]:
    """Its look, and what to say. `truth`: of a simulated coil, what it really is."""
    summary = outcome.summary
    look = VERDICTS[summary.verdict] if summary.outcome == "finished" else OUTCOMES[summary.outcome]
    parts = [f"{summary.outcome}: {outcome.why if summary.outcome == 'open' else summary.reason}"]
    if summary.turns is not None:
        parts.append(turns(summary.turns))
    if summary.dcr_20c_ohm:
        text = ohm(summary.dcr_20c_ohm, summary.dcr_u95_ohm or 0.0)
        parts.append(f"{text.replace('kohm', 'kΩ').replace('ohm', 'Ω')} at 20 °C")
    if summary.outcome == "finished":
        parts.append(summary.verdict)
    parts.append(f"record {short_digest(outcome.record_digest)}")
    if truth:
        parts.append(f"really {truth}")
    return look, " · ".join(parts)
