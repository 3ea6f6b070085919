"""Runs the clauses over one board, and tells how each ended."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from enum import Enum
from typing import Any

from tests.firmware.conformance import (  # importing a section's file puts its clauses into the list
    conversation,
    frames,
    guide,
    others,
    readings,
    spindle,
    states,
    trips,
)
from tests.firmware.conformance.clause import CLAUSES, Clause, NotAsWrittenError, NotJudgedError
from tests.firmware.conformance.rig import Rig
from windctl.protocol.messages import Capability

SECTIONS = (frames, conversation, states, spindle, guide, readings, trips, others)


class Verdict(Enum):
    """How a clause ended."""

    HOLDS = "holds"
    FAILS = "FAILS"
    NOT_FITTED = "not fitted"
    NOT_JUDGED = "not judged"


@dataclass(frozen=True)
class Finding:
    """One clause on this board: a figure, or what was found instead."""

    clause: Clause
    verdict: Verdict
    detail: str

    def as_json(self) -> dict[str, Any]:
        """For reports."""
        of = self.clause
        return {
            "section": of.section,
            "title": of.title,
            "says": of.says,
            "verdict": self.verdict.value.lower(),
            "detail": self.detail,
        }


def clauses() -> list[Clause]:
    """All, in the specification's order."""
    return sorted(CLAUSES, key=lambda one: one.section)


def judge(rig: Rig, clause: Clause) -> Finding:
    """One clause. Greets first, to know what is fitted; afterwards the board is held."""
    try:
        rig.greet()
        missing = clause.needs & ~rig.capabilities
        if missing:
            names = ", ".join(bit.name.lower() for bit in Capability if bit & missing and bit.name)
            return Finding(clause, Verdict.NOT_FITTED, names)
        return Finding(clause, Verdict.HOLDS, clause.check(rig) or "")
    except NotAsWrittenError as found:
        return Finding(clause, Verdict.FAILS, str(found))
    except NotJudgedError as reason:
        return Finding(clause, Verdict.NOT_JUDGED, str(reason))
    finally:
        rig.beating = True
        rig.hold()


def judge_all(
    rig: Rig, chosen: Sequence[Clause], seen: Callable[[Finding], None] = lambda _: None
) -> list[Finding]:
    """Every clause in turn; `seen` hears each finding as it is made. Afterwards the drives are off."""
    findings: list[Finding] = []
    for clause in chosen:
        finding = judge(rig, clause)
        findings.append(finding)
        seen(finding)
    try:
        rig.fresh()
    except (NotAsWrittenError, NotJudgedError) as left:
        last = findings[-1].clause
        findings.append(Finding(last, Verdict.FAILS, f"the drives could not be taken off at the end: {left}"))
    return findings
