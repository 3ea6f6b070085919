"""Whether a coil is what was ordered, as far as can be known."""

from __future__ import annotations

from typing import Literal, TypeAlias

Verdict: TypeAlias = Literal["within", "outside", "not judged"]


def verdict(low: float, high: float, target: float, tolerance_pct: float) -> Verdict:
    """The 95 % interval against the tolerance around the target, all in the target's unit.

    Inside it is "within", beyond it "outside"; an interval that straddles a limit is "not judged".
    """
    allowed = abs(target) * tolerance_pct / 100.0
    if target - allowed <= low and high <= target + allowed:
        return "within"
    if high < target - allowed or low > target + allowed:
        return "outside"
    return "not judged"
