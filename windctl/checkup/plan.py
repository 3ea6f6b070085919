"""All steps in their safe order, and their results as a report."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import Any, Final

from windctl.checkup.powered import POWERED
from windctl.checkup.step import Result, Step, Verdict
from windctl.checkup.still import STILL

STEPS: Final[tuple[Step, ...]] = (*STILL, *POWERED)


def chosen(keys: Iterable[str] = (), *, powered: bool = True, hands: bool = True) -> Sequence[Step]:
    """The steps of these keys (none: all), the greeting always among them.

    `powered` False: only those that power nothing; `hands` False: only those that ask nothing of a person.
    """
    wanted = set(keys)
    return [
        step
        for step in STEPS
        if (not wanted or step.key in wanted or step.key == "greeting")
        and (powered or not step.powered)
        and (hands or not step.hand)
    ]


def calibrations(results: Iterable[Result]) -> dict[str, float | int]:
    """What was measured and belongs into the profile, by its keys."""
    found: dict[str, float | int] = {}
    for result in results:
        found |= result.calibration
    return found


def as_json(results: Sequence[Result]) -> dict[str, Any]:
    """For scripts."""
    return {
        "steps": [
            {
                "step": one.key,
                "verdict": one.verdict.value,
                "measured": one.measured,
                "limit": one.limit,
                "advice": one.advice,
            }
            for one in results
        ],
        "calibration": calibrations(results),
        "faults": sum(one.verdict is Verdict.FAULT for one in results),
    }
