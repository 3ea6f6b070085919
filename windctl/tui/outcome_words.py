"""How a coil went, in a line. Pure."""

from __future__ import annotations

from typing import TYPE_CHECKING

from windctl.desk.numbers import counted, ohm, turns
from windctl.tui.looks import OUTCOMES, VERDICTS, Look, look_of
from windctl.tui.view import Next

if TYPE_CHECKING:
    from windctl.run.outcome import Outcome


def after_words(outcome: Outcome, look: Look) -> tuple[Look, Next]:
    """The band once a run is over: how it ended, and where to go."""
    if outcome.error is not None or outcome.left == "unconfirmed":
        return look_of("failed"), Next("the coil stays open", "", "Enter: back, R there goes on")
    if outcome.summary.outcome == "open":
        return look_of("held"), Next("the coil stays open", "", "Enter: back, R there goes on")
    word = outcome.summary.outcome
    role = {"finished": "ended", "tripped": "alarm"}.get(word, "held")
    return Look(word, look.glyph, role), Next(look.word, "", "Enter: its record · N: the next")


def outcome_words(outcome: Outcome, truth: str = "") -> tuple[Look, str]:
    """Its look, and what to say. `truth`: of a simulated coil, what it really is."""
    summary = outcome.summary
    look = VERDICTS[summary.verdict] if summary.outcome == "finished" else OUTCOMES[summary.outcome]
    parts = [outcome.why if summary.outcome == "open" else summary.reason]
    if summary.turns is not None:
        parts.append(turns(summary.turns))
    if summary.dcr_20c_ohm:
        text = ohm(summary.dcr_20c_ohm, summary.dcr_u95_ohm or 0.0)
        parts.append(f"{text.replace('kohm', 'kΩ').replace('ohm', 'Ω')} at 20 °C")
    parts.append(f"record {outcome.record_digest[:8]}")
    again = outcome.waiting
    judged = summary.outcome == "finished" and summary.target_kind != "turns"
    if again is not None and judged and summary.verdict != "within":
        cold = ohm(again.ohm).replace("kohm", "kΩ").replace("ohm", "Ω")
        minutes = counted(again.minutes, "minute")
        parts.append(f"still warm: wait {minutes} and read again, cold it should show {cold}")
    if truth:
        parts.append(f"really {truth}")
    return look, " · ".join(parts)
