"""When the readings say that something is wrong with the coil, the wire, the count or the contact."""

from __future__ import annotations

from dataclasses import dataclass
from math import exp, log, sqrt

from windctl.forecast.belief import SHOWN, moved
from windctl.forecast.estimator import Estimate, Surprise
from windctl.numbers import grouped

_RUN = 5  # open circuits, or readings near zero, in a row: a bouncing contact rarely shows two
_BEYOND = 3.6  # standard deviations of the prior; a right coil goes there once in 3 000
_AREA_PER_GAUGE = 92.0 ** (2.0 / 39.0)  # ohm per metre from one gauge number to the next (ASTM B258's law)
_GAUGE_ODDS = {
    1: 0.01,
    2: 0.003,
    3: 0.001,
}  # of fetching a spool that many numbers off, each way; our judgement
_OTHER_ODDS, _OTHER_SD = (
    0.01,
    0.15,
)  # anything else that scales the resistance: core, count, wire; our judgement
_MANY_GATED = 10
# A contact that bounces, and a wire that is broken or shorted for good, per reading; how often a bounce shows
# the same again in the next reading, and how often two other bounces agree. Our judgement.
_BOUNCES, _BREAKS = 0.005, 1e-4
_STAYS, _AGREE = 0.1, 1e-3
_BELIEVED = 4  # readings that agree on a jump before it is one
_MOST_ODDS = 1e6


@dataclass(frozen=True, slots=True)
class Alarm:
    """What is wrong: `kind` is "open", "short", "jump", "wire", "unsteady" or "doubt".

    `odds`: of the named reason against everything being right, at most a million; None where none is named.
    """

    kind: str
    text: str
    odds: float | None = None


def alarm(estimate: Estimate) -> str | None:
    """The alarm's text, or None when the readings are what the prior allows."""
    found = find_alarm(estimate)
    return None if found is None else found.text


def find_alarm(estimate: Estimate) -> Alarm | None:
    """The gravest alarm that the readings so far give cause for."""
    if estimate.open_run >= _RUN:
        odds = _lasting(estimate.open_run, _STAYS)
        return Alarm(
            "open",
            f"the last {estimate.open_run} readings show an open circuit: the wire is broken or the contact "
            f"is off ({_against(odds)} a bouncing contact); hold, and look at the wire and the contact",
            odds,
        )
    if estimate.zero_run >= _RUN:
        odds = _lasting(estimate.zero_run, _STAYS)
        return Alarm(
            "short",
            f"the last {estimate.zero_run} readings show next to nothing: a short across the coil, to the "
            f"core, or between the leads ({_against(odds)} a bouncing contact); hold, and measure by hand",
            odds,
        )
    if estimate.jump is not None:
        return _jump(estimate.jump)
    wire = _wire(estimate)
    if wire is not None:
        return wire
    if estimate.gated >= _MANY_GATED and estimate.gated > estimate.used:
        return Alarm(
            "unsteady",
            f"{estimate.gated} of {estimate.gated + estimate.used} readings disagree with the others: the "
            "forecast rests on the rest; clean the contact or measure at rest",
        )
    return None if estimate.doubt is None else _doubt(estimate.doubt)


def _doubt(doubt: Surprise) -> Alarm:
    return Alarm(
        "doubt",
        f"the reading at rest at turn {grouped(doubt.turn)} shows {doubt.seen_ohm:.1f} ohm where "
        f"{doubt.expected_ohm:.1f} ohm is expected, and is not used: measure again, and check the count",
    )


def _jump(jump: Surprise) -> Alarm:
    if jump.seen_ohm < jump.expected_ohm:
        why = "shorted turns, a short to the core, or turns that were counted but not wound"
    else:
        why = "a bad joint or contact, or turns that were wound but not counted"
    odds = _lasting(_BELIEVED, _AGREE)
    return Alarm(
        "jump",
        f"at turn {grouped(jump.turn)} the readings went from {jump.expected_ohm:.1f} to "
        f"{jump.seen_ohm:.1f} ohm and stayed there: {why} ({_against(odds)} a bouncing contact)",
        odds,
    )


def _lasting(readings: int, again: float) -> float:
    """Odds of a fault that lasts against so many bounces in a row, each like the one before with `again`."""
    return min(_BREAKS / _BOUNCES / again ** (readings - 1), _MOST_ODDS)


def _against(odds: float) -> str:
    return f"odds {'of more than a million' if odds >= _MOST_ODDS else f'{odds:.0f}'} to 1 against"


def _wire(estimate: Estimate) -> Alarm | None:
    """Resistance per turn against the prior: how far off, and what most likely explains it."""
    if estimate.trust < 2:
        return None
    belief = estimate.belief
    expected = moved(estimate.reference, belief.turn, estimate.walk)
    grown = expected.mean[SHOWN] - estimate.reference.mean[SHOWN]
    before, after = expected.cov[SHOWN][SHOWN], belief.cov[SHOWN][SHOWN]
    gained = before - after  # variance of the move from the one mean to the other
    off = belief.mean[SHOWN] - expected.mean[SHOWN]
    if grown <= 0.0 or gained <= 0.0 or abs(off) <= _BEYOND * sqrt(gained):
        return None
    pulled = gained / before  # the estimate lies between the prior and what the readings say: take that out
    off /= pulled
    read_sd = sqrt(max(after, 0.0) / pulled)
    steps, odds = likeliest(1.0 + off / grown, sqrt(before) / grown, read_sd / grown)
    side = "above" if off > 0.0 else "below"
    start = f"the resistance is {abs(100.0 * off / grown):.1f} % {side} what is expected of this coil"
    odds = min(odds, _MOST_ODDS)
    against = f"{_against(odds)} the recipe's"
    if steps == 0:
        return Alarm(
            "wire", f"{start}: another wire, another core or a wrong count ({against}); check the spool", odds
        )
    kind = "thinner" if steps > 0 else "thicker"
    numbers = "one gauge number" if abs(steps) == 1 else f"{abs(steps)} gauge numbers"
    return Alarm("wire", f"{start}: the wire is probably {numbers} {kind} ({against}); check the spool", odds)


def likeliest(ratio: float, wire_sd: float, read_sd: float = 0.0) -> tuple[int, float]:
    """Which wire best explains `ratio`, the resistance read over the one expected.

    `wire_sd` is the relative sd of coils of any one gauge, `read_sd` the sd of the reading of the ratio.
    Returns gauge numbers off (0: none of them, something else) and its odds against the recipe's wire.
    """

    def fit(centre: float, own_sd: float) -> float:
        return _log_normal(ratio - centre, sqrt(own_sd**2 + read_sd**2))

    candidates = [(log(_OTHER_ODDS) + fit(1.0, sqrt(wire_sd**2 + _OTHER_SD**2)), 0)]
    for number, odds in _GAUGE_ODDS.items():
        for steps in (number, -number):
            centre = _AREA_PER_GAUGE**steps
            candidates.append((log(odds) + fit(centre, centre * wire_sd), steps))
    best, steps = max(candidates)
    return steps, exp(min(best - fit(1.0, wire_sd), 700.0))


def _log_normal(x: float, sd: float) -> float:
    return -0.5 * (x / sd) ** 2 - log(sd)
