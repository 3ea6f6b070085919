"""The four charts of a coil over its turns: resistance, forecast finish, speed, tension."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from windctl.numbers import grouped, ohm
from windctl.paper import svg
from windctl.paper.course import Span
from windctl.paper.plot import Axis, Entry, Plot, axis, axis_over
from windctl.paper.svg import COPPER, INK, MUTED, SAND, Pen
from windctl.record.curve import CurvePoint
from windctl.record.events import Target

_Z95 = 1.959964
_CURVE = Pen(COPPER, 1.8)
_EDGE = Pen(COPPER, 0.6)
_LIMIT = Pen(INK, 0.9, "7 3")
_GOAL = Pen(INK, 0.9)
_EVENT = Pen(MUTED, 0.8, "1.5 2.5")
_TURNS = "turns"
_HEADROOM = 1.02  # above the highest value
_SPAN = 2.5  # a chart of the finish shows so many times the tolerance, or half-widths at its quarter
_FEW = 25  # readings of which each is marked
_MOST_EVENTS = 4  # that are named within a chart


_Known = tuple[float, float, float]  # turn, forecast, half-width


@dataclass(frozen=True, slots=True)
class Marked:
    """Something that happened at a turn, in a word."""

    turn: float
    word: str


def resistance(
    curve: Sequence[CurvePoint],
    target: Target,
    turns: float,
    read: Sequence[tuple[float, float]] = (),
    marked: Sequence[Marked] = (),
    final: tuple[float, float] | None = None,
) -> str:
    """Resistance at 20 degrees C over turns, in kohm or ohm. `read`: (turn, ohm at 20 degrees C) read by
    hand; `final`: the finished coil's, and its 95 % half-width."""
    most = max([point.ohm_20c for point in curve] + [value for _, value in read] + [(final or (1.0, 0.0))[0]])
    goal = target.value if target.kind != "turns" else None
    unit, per = ("kohm", 1000.0) if max(most, goal or 0.0) >= 1000 else ("ohm", 1.0)
    x = axis(0.0, max(turns, target.value if target.kind == "turns" else 0.0), _TURNS, widen=False)
    share = target.tolerance_pct / 100.0
    top = max(most, (goal or 0.0) * (1 + share))  # room for the whole band of the tolerance
    y = axis(0.0, _HEADROOM * top / per, f"{unit} at 20 °C", most=5, widen=False)
    plot = Plot("resistance", _roomy(x), y, height=215)
    layers, legend = [], []
    if goal is not None:
        wide = [(at, goal * (1 - share) / per, goal * (1 + share) / per) for at in (plot.x.low, plot.x.high)]
        layers += [plot.band(wide, svg.HAZE), plot.across(goal / per, _GOAL)]
        legend.append(Entry(f"target {ohm(goal)} ± {target.tolerance_pct:g} %", _GOAL, fill=svg.HAZE))
    else:
        layers.append(plot.upright(target.value, _GOAL))
        legend.append(Entry(f"target {grouped(target.value)} turns", _GOAL))
    layers += _events(plot, marked)
    if len(curve) > 1:
        points = [(point.turn, point.ohm_20c / per) for point in curve]
        layers.append(plot.polyline(points, _CURVE))
        few = len(curve) <= _FEW
        layers += [plot.marks(points[1:], "dot", 2.6, COPPER)] if few else []
        legend.append(Entry("resistance so far", _CURVE, "dot" if few else None))
    if read:
        layers.append(plot.marks([(turn, value / per) for turn, value in read], "box", 4))
        legend.append(Entry("read by hand", None, "box"))
    if final is not None:
        value, half = final[0] / per, final[1] / per
        layers += [
            plot.bars([(turns, value - half, value + half)], Pen(INK, 1.2)),
            plot.marks([(turns, value)]),
        ]
        legend.append(Entry("finished coil, 95 %", None, "dot"))
    said = f"It ends at {ohm(*final)} after {grouped(turns)} turns." if final else f"{grouped(turns)} turns."
    return plot.drawn("Resistance over turns", f"Resistance at 20 °C. {said}", *layers, legend=legend)


def finish(curve: Sequence[CurvePoint], target: Target, turns: float, final: float | None) -> str:
    """How the forecast of the finished coil closed in: forecast and 95 % interval from each reading until the
    next, in per cent of the target, or of the finished coil where turns were the target. `curve` must not be
    empty."""
    goal = target.value if target.kind != "turns" else (final or curve[-1].final_ohm)
    known = [
        (point.turn, 100.0 * (point.final_ohm / goal - 1.0), 100.0 * _Z95 * point.final_sd / goal)
        for point in curve
    ]
    held = list(_held(known, turns))
    late = [one for one in known if one[0] >= 0.25 * turns] or known[-1:]
    span = 1.15 * max(abs(middle) + half for _, middle, half in late)
    limits = 0.0 if target.kind == "turns" else target.tolerance_pct
    span = max(span, 1.4 * limits, 0.2)
    of = "target" if target.kind != "turns" else "finished coil"
    plot = Plot(
        "finish", _roomy(axis(0.0, turns, _TURNS, widen=False)), _even(span, f"% of {of}"), height=200
    )
    layers = [plot.band([(x, y - half, y + half) for x, y, half in held], SAND, _EDGE)]
    layers.append(plot.across(0.0, _GOAL))
    legend = [Entry("forecast finish", _CURVE), Entry("its 95 % interval", _EDGE, fill=SAND)]
    if limits:
        layers += [plot.across(edge, _LIMIT) for edge in (-limits, limits)]
        legend.append(Entry(f"tolerance ± {limits:g} %", _LIMIT))
    layers.append(plot.polyline([(x, y) for x, y, _ in held], _CURVE))
    desc = f"The interval's half-width went from {known[0][2]:.2g} % to {known[-1][2]:.2g} % of the {of}."
    return plot.drawn("Forecast of the finished coil", desc, *layers, legend=legend)


def speed(spans: Sequence[Span], turns: float, marked: Sequence[Marked] = ()) -> str:
    """Spindle speed over turns, rpm. `spans` must not be empty."""
    x = _roomy(axis(0.0, turns, _TURNS, widen=False))
    plot = Plot(
        "speed", x, axis(0.0, 0.999 * max(span.high for span in spans), "rpm", most=4), height=170, top=16
    )
    line = plot.polyline([(span.turn, span.mean) for span in spans], Pen(INK, 1.4))
    fastest = max(span.high for span in spans)
    return plot.drawn("Spindle speed over turns", f"Up to {fastest:.0f} rpm.", *_events(plot, marked), line)


def tension(spans: Sequence[Span], turns: float, band_cn: tuple[float, float] | None) -> str:
    """Tension of the wire over turns, cN: the mean of whole turns, and how far it went within each part.
    `band_cn`: what the machine allowed. `spans` must not be empty."""
    values = [span.low for span in spans] + [span.high for span in spans] + list(band_cn or ())
    x = _roomy(axis(0.0, turns, _TURNS, widen=False))
    plot = Plot("tension", x, axis_over([0.0, *values], "cN", most=4), height=200)
    layers = [plot.band([(span.turn, span.low, span.high) for span in spans], svg.HAZE, Pen(MUTED, 0.5))]
    legend = [Entry("mean", Pen(INK, 1.4)), Entry("lowest and highest turn", Pen(MUTED, 0.5), fill=svg.HAZE)]
    if band_cn is not None:
        layers += [plot.across(edge, _LIMIT) for edge in band_cn]
        legend.append(Entry("allowed", _LIMIT))
    layers.append(plot.polyline([(span.turn, span.mean) for span in spans], Pen(INK, 1.4)))
    mean = sum(span.mean for span in spans) / len(spans)
    return plot.drawn("Wire tension over turns", f"{mean:.1f} cN in the mean.", *layers, legend=legend)


def _roomy(whole: Axis) -> Axis:
    """A little room behind the last turn."""
    return Axis(whole.low, whole.high * 1.02, whole.label, whole.ticks)


def _even(span: float, label: str) -> Axis:
    return axis(-span, span, label, most=6, widen=False)


def _held(known: Sequence[_Known], turns: float) -> Iterator[_Known]:
    """Each value kept until the next reading, the last until the end."""
    for n, (at, middle, half) in enumerate(known):
        yield at, middle, half
        yield known[n + 1][0] if n + 1 < len(known) else max(turns, at), middle, half


def _events(plot: Plot, marked: Sequence[Marked]) -> list[str]:
    named = list(marked)[:_MOST_EVENTS]
    return [
        plot.upright(one.turn, _EVENT, one.word if one in named else "", row=n % 3)
        for n, one in enumerate(marked)
    ]
