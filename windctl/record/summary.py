"""What the coil book's index says of a coil: a view of its folded facts, never a fact of its own."""

from __future__ import annotations

from dataclasses import dataclass

from windctl.record.fold import State


@dataclass(frozen=True, slots=True)
class CoilSummary:
    """One line of the coil book. Resistances in ohm at 20 degrees C; None is "not known"."""

    recipe: str
    recipe_digest: str
    outcome: str  # "finished", "stopped", "tripped", "open"
    reason: str
    turns: float | None
    dcr_20c_ohm: float | None
    dcr_u95_ohm: float | None
    target_kind: str
    target_value: float
    verdict: str  # "within", "outside", "not judged"
    batch: str
    program_digest: str


def summarise(state: State) -> CoilSummary:
    """The summary of a coil that has started.

    Raises ValueError before its first fact.
    """
    started, finished = state.started, state.finished
    if started is None:
        raise ValueError("a coil without its first fact has no summary")
    return CoilSummary(
        recipe=started.recipe_name,
        recipe_digest=started.recipe_digest,
        outcome=finished.outcome if finished else "open",
        reason=finished.reason if finished else _why_open(state),
        turns=finished.turns if finished else state.turns,
        dcr_20c_ohm=finished.dcr_20c_ohm if finished else None,
        dcr_u95_ohm=finished.dcr_u95_ohm if finished else None,
        target_kind=started.target.kind,
        target_value=started.target.value,
        verdict=finished.verdict if finished else "not judged",
        batch=started.batch,
        program_digest=started.program_digest,
    )


def _why_open(state: State) -> str:
    if state.hold is not None:
        return state.hold.reason
    if state.link_lost is not None:
        return state.link_lost.reason
    return "not finished"
