"""Coils of one recipe in the order in which they were wound: whether they come out alike, and if not, since
when. Charted is what the target left free to vary."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict, dataclass
from typing import Any

from windctl.numbers import counted, grouped
from windctl.shop.capability import Capability, Index, capability
from windctl.shop.control import Chart, Rule, Signal, individuals, signals, wide_ranges

OHM_PER_TURN, TURNS, RESISTANCE = "ohm-per-turn", "turns", "resistance"
QUANTITIES = (OHM_PER_TURN, TURNS, RESISTANCE)
FIRM_FROM = 20  # coils from which limits are firm; common practice, no source


@dataclass(frozen=True, slots=True)
class LotCoil:
    """A finished coil. `ohm` at 20 degrees C as it was measured, None where it was not, with the 95 %
    half-width; its target as in the record."""

    number: str
    turns: float
    ohm: float | None
    u95_ohm: float | None
    target_kind: str
    target_value: float
    tolerance_pct: float

    def value(self, quantity: str) -> float | None:
        """In turns, ohm or ohm per turn."""
        if quantity == TURNS:
            return self.turns
        if self.ohm is None or quantity == RESISTANCE:
            return self.ohm
        return self.ohm / self.turns if self.turns > 0 else None


@dataclass(frozen=True, slots=True)
class Lot:
    """A chart of coils, what is out, and how it compares with limits, if there are any.

    `judged`: the quantity that `capability` is of.
    """

    quantity: str
    coils: tuple[LotCoil, ...]
    left_out: tuple[LotCoil, ...]  # without a value
    chart: Chart
    rules: tuple[Rule, ...]
    signals: tuple[Signal, ...]
    wide: tuple[int, ...]
    judged: str
    capability: Capability | None
    why_not: str  # why there is no capability; "" where there is one


def free_quantity(coils: Sequence[LotCoil]) -> str:
    """What the targets of these coils left free to vary: turns where resistance was asked for, resistance
    where turns were; ohm per turn where both were."""
    kinds = {coil.target_kind for coil in coils}
    if kinds == {"turns"}:
        return RESISTANCE
    return OHM_PER_TURN if "turns" in kinds else TURNS


def lot_of(
    coils: Sequence[LotCoil],
    quantity: str,
    rules: Sequence[Rule],
    *,
    baseline: int | None = None,
    limits: tuple[float | None, float | None] = (None, None),
) -> Lot:
    """The chart of coils in order. `baseline`: the limits come from so many of the first; `limits`: what the
    charted quantity is to lie within, else the target and its tolerance are taken.

    Raises ValueError where too few coils have a value.
    """
    with_value = [(coil, value) for coil in coils if (value := coil.value(quantity)) is not None]
    used = tuple(coil for coil, _ in with_value)
    chart = individuals([value for _, value in with_value], baseline)
    judged, found, why_not = _judged(used, quantity, limits)
    return Lot(
        quantity,
        used,
        tuple(coil for coil in coils if coil.value(quantity) is None),
        chart,
        tuple(rules),
        signals(chart, rules),
        wide_ranges(chart),
        judged,
        found,
        why_not,
    )


def _judged(
    coils: Sequence[LotCoil], quantity: str, limits: tuple[float | None, float | None]
) -> tuple[str, Capability | None, str]:
    low, high = limits
    judged = quantity
    if low is None and high is None:
        targets = {(coil.target_kind, coil.target_value, coil.tolerance_pct) for coil in coils}
        if len(targets) > 1:
            return judged, None, "the coils had different targets; say what they are to lie within"
        kind, target, tolerance_pct = targets.pop()
        judged = TURNS if kind == "turns" else RESISTANCE
        allowed = target * tolerance_pct / 100.0
        low, high = target - allowed, target + allowed
    values = [value for coil in coils if (value := coil.value(judged)) is not None]
    if len(set(values)) == 1:
        return judged, None, f"all coils have {written(judged, values[0])}"
    if len(values) < 2:
        return judged, None, f"the {name_of(judged)} of too few coils is known"
    return judged, capability(values, low, high), ""


def name_of(quantity: str) -> str:
    """As it is said: "ohm per turn"."""
    return quantity.replace("-", " ")


def unit_of(quantity: str, about: float) -> tuple[float, str]:
    """What a value near `about` is divided by for people, and the unit."""
    if quantity == TURNS:
        return 1.0, "turns"
    if quantity == OHM_PER_TURN:
        return 1.0, "ohm/turn"
    return (1000.0, "kohm") if abs(about) >= 1000 else (1.0, "ohm")


def written(quantity: str, value: float, spread: float = 0.0, unit: bool = True) -> str:
    """A value for people, to two significant digits of `spread`."""
    scale, words = unit_of(quantity, value)
    usual = {"turns": 0, "kohm": 3, "ohm": 1, "ohm/turn": 4}[words]
    decimals = _decimals(spread / scale) if spread > 0.0 else usual
    return f"{grouped(value / scale, decimals)} {words}" if unit else grouped(value / scale, decimals)


def _decimals(spread: float) -> int:
    decimals = 0
    while decimals < 9 and spread * 10**decimals < 10.0:
        decimals += 1
    return decimals


def out_of(lot: Lot) -> frozenset[int]:
    """Places of the coils that a broken rule speaks of: within its row, those on its side of the centre."""
    centre = lot.chart.centre
    return frozenset(
        at
        for signal in lot.signals
        for at in range(signal.first, signal.last + 1)
        if signal.rule.speaks_of(signal.side, lot.chart.values[at] - centre)
    )


def says(lot: Lot) -> list[str]:
    """What is out, by which rule and since which coil; or that nothing is."""
    lines = [_signal_words(lot, signal) for signal in lot.signals]
    for at in lot.wide:
        step = lot.chart.values[at] - lot.chart.values[at - 1]
        limit = written(lot.quantity, lot.chart.high_range, lot.chart.sigma)
        lines.append(
            f"from {lot.coils[at - 1].number} to {lot.coils[at].number}: a step of {'+' if step > 0 else ''}"
            f"{written(lot.quantity, step, lot.chart.sigma)}, more than the limit of {limit}"
        )
    if not lines:
        lines.append(f"nothing is out by the {lot.rules[0].set} rules")
    if lot.chart.baseline < FIRM_FROM:
        lines.append(
            f"limits from {counted(lot.chart.baseline, 'coil')} are a first guess; "
            f"from {FIRM_FROM} on they are firm"
        )
    return lines


def _signal_words(lot: Lot, signal: Signal) -> str:
    first, last, seen = (lot.coils[at].number for at in (signal.first, signal.last, signal.seen))
    above, below = signal.rule.sides
    side = {1: f", {above}", -1: f", {below}", 0: ""}[signal.side]
    words = f"{signal.rule.words}{side} ({signal.rule.name})"
    if signal.first == signal.last:
        return f"{first}: {words}"
    when = f"since {first}" if signal.last == len(lot.coils) - 1 else f"from {first} to {last}"
    also = "" if signal.seen in (signal.first, signal.last) else f", seen at {seen}"
    return f"{when}: {words}{also}"


def capability_words(lot: Lot) -> list[str]:
    """How the coils compare with their limits."""
    found = lot.capability
    if found is None:
        return [f"no capability: {lot.why_not}"]
    quantity = lot.judged
    ends = [
        None if end is None else written(quantity, end, found.sd, unit=False)
        for end in (found.low, found.high)
    ]
    unit = unit_of(quantity, found.mean)[1]
    within = (
        f"{ends[0]} to {ends[1]} {unit}"
        if ends[0] and ends[1]
        else f"{'at least' if ends[0] else 'at most'} {ends[0] or ends[1]} {unit}"
    )
    indices = [] if found.cp is None else [f"Cp {_index(found.cp)}"]
    indices.append(f"Cpk {_index(found.cpk)}")
    lines = [f"{name_of(quantity)} within {within}: {', '.join(indices)}, 95 % intervals, {found.n} coils"]
    if lot.signals or lot.wide:
        lines.append("something is out, so what these coils did says little of the next ones")
    halves = [
        coil.u95_ohm / coil.ohm for coil in lot.coils if coil.u95_ohm and coil.ohm and quantity != TURNS
    ]
    if halves:
        off = 100.0 * max(halves)
        lines.append(
            f"what the meter is off by for all of them, up to ± {off:.2g} %, is not in these indices"
        )
    return lines


def _index(index: Index) -> str:
    return f"{index.value:.2f} ({index.low:.2f} to {index.high:.2f})"


def as_json(lot: Lot) -> dict[str, Any]:
    """The chart as other programs read it; places are coil numbers."""
    chart = lot.chart
    steps = (None, *chart.ranges)
    return {
        "quantity": lot.quantity,
        "unit": {TURNS: "turns", OHM_PER_TURN: "ohm/turn", RESISTANCE: "ohm"}[lot.quantity],
        "coils": [
            {"coil": coil.number, "value": value, "moving_range": step}
            for coil, value, step in zip(lot.coils, chart.values, steps, strict=True)
        ],
        "baseline": chart.baseline,
        "centre": chart.centre,
        "sigma": chart.sigma,
        "limits": {"low": chart.low, "high": chart.high},
        "mean_range": chart.mean_range,
        "range_limit": chart.high_range,
        "rules": lot.rules[0].set,
        "signals": [
            {
                "rule": signal.rule.number,
                "words": signal.rule.words,
                "first": lot.coils[signal.first].number,
                "seen": lot.coils[signal.seen].number,
                "last": lot.coils[signal.last].number,
                "side": {1: "above", -1: "below", 0: ""}[signal.side],
            }
            for signal in lot.signals
        ],
        "wide_ranges": [lot.coils[at].number for at in lot.wide],
        "capability": None if lot.capability is None else {"of": lot.judged, **asdict(lot.capability)},
        "left_out": [coil.number for coil in lot.left_out],
        "says": says(lot),
    }
